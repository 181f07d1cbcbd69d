// Reading a whole text file, with every failure told.
#pragma once

#include <cstddef>
#include <string>

namespace wanewall {

/// The bytes of a file, at most `most_bytes` + 1 of them, so that a larger one can be told. Throws FileError
/// that names the file, what was being done and why it failed; folders and missing files included.
std::string read_text_file(const std::string& path, const std::string& doing, std::size_t most_bytes);

}  // namespace wanewall
