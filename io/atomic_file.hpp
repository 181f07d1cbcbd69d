// Files that appear under their name only when they are whole.
#pragma once

#include <string>
#include <string_view>

namespace wanewall {

/// A file written beside its final name, in the same folder, and renamed onto it by commit(). Until then
/// whatever bore the final name stays as it was. A file that is destroyed before commit() leaves nothing
/// behind.
class AtomicFile {
 public:
  /// Throws FileError when the folder is missing or not writable, or when the final name is taken by
  /// something that is not a regular file.
  explicit AtomicFile(const std::string& final_path);
  ~AtomicFile();
  AtomicFile(const AtomicFile&) = delete;
  AtomicFile& operator=(const AtomicFile&) = delete;

  const std::string& final_path() const { return final_path_; }
  const std::string& temporary_path() const { return temporary_path_; }
  /// Open for reading and writing; owned by this object.
  int descriptor() const { return descriptor_; }

  /// Appends text. Throws FileError, e.g. when the disk is full.
  void write(std::string_view text);
  /// Brings the data to the disk, closes and renames. Throws FileError.
  void commit();

 private:
  [[noreturn]] void fail(const std::string& doing, int error_number) const;

  std::string final_path_;
  std::string temporary_path_;
  int descriptor_ = -1;
};

/// Writes a whole text file in one go. Throws FileError.
void write_atomically(const std::string& path, std::string_view text);

}  // namespace wanewall
