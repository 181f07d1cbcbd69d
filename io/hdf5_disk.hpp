// The way HDF5 reaches the disk when it writes for us.
//
// HDF5 1.10 cannot give up a file: once a write has failed, closing the file fails too, its cache stays
// behind, and the library crashes when the program ends. So this driver never reports a failed write to it.
// It remembers the first failure, keeps what could not be written in memory, and the caller asks for the
// failure after every step.
#pragma once

#include <hdf5.h>

#include <cstddef>
#include <map>
#include <vector>

namespace wanewall::hdf5 {

/// A file descriptor, not owned, and what could not be written to it.
class Disk {
 public:
  explicit Disk(int descriptor) : descriptor_(descriptor) {}

  /// Error number of the first write that failed; 0 while all is well.
  int failure() const { return failure_; }

  void write(std::size_t at, const unsigned char* data, std::size_t size);
  /// Zeros past the end of the file. False when the file cannot be read.
  bool read(std::size_t at, unsigned char* data, std::size_t size);
  void set_length(std::size_t length);
  std::size_t length() const;

 private:
  static constexpr std::size_t page_bytes = 4096;
  using Page = std::vector<unsigned char>;
  bool read_file(std::size_t at, unsigned char* data, std::size_t size) const;
  void write_pages(std::size_t at, const unsigned char* data, std::size_t size);

  int descriptor_;
  int failure_ = 0;
  std::map<std::size_t, Page> pages_;  ///< by page number, after a failure only
};

/// Makes files created with this access list go through `disk`, which must outlive the file. Negative on
/// failure.
herr_t set_disk(hid_t access_list, Disk& disk);

}  // namespace wanewall::hdf5
