// What every handle of one HDF5 file shares: the file's name for messages, and the disk when it is being
// written.
#pragma once

#include <hdf5.h>

#include <memory>
#include <string>

#include "io/hdf5_disk.hpp"

namespace wanewall::hdf5 {

struct Context {
  /// Also switches HDF5's own printing off.
  explicit Context(std::string file_path);

  /// Passes a result of HDF5's C interface on when it is good and the disk has taken everything so far.
  /// Else throws FileError: "<path>: HDF5 failed while <doing> <where>: <HDF5's reasons>".
  template <class Result>
  Result checked(Result result, const std::string& doing, const std::string& where) const {
    if (result < 0 || (disk && disk->failure() != 0)) fail(doing, where);
    return result;
  }
  [[noreturn]] void fail(const std::string& doing, const std::string& where) const;

  std::string path;
  std::unique_ptr<Disk> disk;  ///< empty when reading
};

}  // namespace wanewall::hdf5
