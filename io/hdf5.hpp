// The one edge over HDF5's C interface. Every call is checked; a failure becomes a FileError that names the
// file, what was being done, and HDF5's own reasons. HDF5's printing is switched off.
//
// Files are written in the 1.10 layout, whose metadata carry checksums, and every dataset is chunked,
// shuffled and deflated, which puts a checksum on its data too: damage is noticed when a file is read.
//
// HDF5 keeps global state: use this from one thread at a time.
#pragma once

#include <hdf5.h>

#include <complex>
#include <cstdint>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include "io/atomic_file.hpp"

namespace wanewall::hdf5 {

/// Entries per axis, slowest first.
using Shape = std::vector<std::size_t>;
std::size_t n_entries(const Shape& shape);

struct Context;

/// Owns one HDF5 identifier.
class Handle {
 public:
  using Closer = herr_t (*)(hid_t);
  Handle() = default;
  Handle(hid_t id, Closer closer) : id_(id), closer_(closer) {}
  ~Handle() { reset(); }
  Handle(Handle&& other) noexcept : id_(other.id_), closer_(other.closer_) { other.id_ = -1; }
  Handle& operator=(Handle&& other) noexcept;
  hid_t get() const { return id_; }
  hid_t release() { return std::exchange(id_, -1); }
  void reset();

 private:
  hid_t id_ = -1;
  Closer closer_ = nullptr;
};

/// What a dataset's entries are. `complex_*` are compounds with the members "r" and "i".
enum class Entry { float32, float64, integer, complex_float32, complex_float64, text, other };

/// A group or a dataset: what carries attributes. Texts are fixed-length; ASCII where they can be, else
/// UTF-8.
class Object {
 public:
  void set_text(const std::string& name, const std::string& value);
  void set_texts(const std::string& name, const std::vector<std::string>& values);
  void set_number(const std::string& name, double value);
  void set_numbers(const std::string& name, const std::vector<double>& values);
  void set_integer(const std::string& name, std::int64_t value);
  void set_integers(const std::string& name, const std::vector<std::int64_t>& values);
  void set_uint32(const std::string& name, std::uint32_t value);

  bool has_attribute(const std::string& name) const;
  std::string text(const std::string& name) const;
  std::vector<std::string> texts(const std::string& name) const;
  double number(const std::string& name) const;
  std::vector<double> numbers(const std::string& name) const;
  std::int64_t integer(const std::string& name) const;
  std::vector<std::int64_t> integers(const std::string& name) const;

  /// Path inside the file.
  const std::string& where() const { return where_; }
  /// Throws a FileError about this object.
  [[noreturn]] void refuse(const std::string& why) const;

 protected:
  Object() = default;
  Object(Handle handle, std::shared_ptr<Context> context, std::string where);
  hid_t id() const { return handle_.get(); }

  Handle handle_;
  std::shared_ptr<Context> context_;
  std::string where_;
};

/// Entries are float, double, std::int64_t, std::complex<float>, std::complex<double> or std::string.
class Dataset : public Object {
 public:
  Shape shape() const;
  Entry entry() const;
  /// All entries. Precision is converted; anything else that does not fit is a FileError.
  template <class T>
  std::vector<T> read() const;
  /// The entries in [begin, begin + count) along each axis.
  template <class T>
  std::vector<T> read_window(const Shape& begin, const Shape& count) const;

 private:
  friend class Group;
  using Object::Object;
  template <class T>
  std::vector<T> read_selected(hid_t memory_space, hid_t file_space, std::size_t entries) const;
};

class Group : public Object {
 public:
  bool has(const std::string& name) const;
  /// Names of the members in the order in which they were made.
  std::vector<std::string> names() const;
  Group group(const std::string& name) const;
  Dataset dataset(const std::string& name) const;

  Group create_group(const std::string& name);
  template <class T>
  Dataset create(const std::string& name, const Shape& shape, const std::vector<T>& values);
  /// One long text, as a dataset with one entry.
  Dataset create_text(const std::string& name, const std::string& text);

 protected:
  friend class File;
  using Object::Object;
};

/// An HDF5 file: read, or written through an AtomicFile. It is also its own root group.
class File : public Group {
 public:
  /// Opens for reading.
  static File open(const std::string& path);
  /// Starts an empty file in place of `target`, which must outlive it and be committed after close().
  static File create(AtomicFile& target);
  /// Writes what is still in memory. A FileError here means that the file is not whole.
  void close();

 private:
  File(Handle file, Handle root, std::shared_ptr<Context> context);
  Handle file_;
};

}  // namespace wanewall::hdf5
