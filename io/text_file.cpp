#include "io/text_file.hpp"

#include <fmt/format.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <memory>

#include "io/errors.hpp"

namespace wanewall {

std::string read_text_file(const std::string& path, const std::string& doing, std::size_t most_bytes) {
  const auto fail = [&](const std::string& why) {
    throw FileError(fmt::format("{}: {}: {}\n  next: check the name and the permissions", path, doing, why));
  };
  std::error_code status;
  if (path.find('\0') != std::string::npos) fail("the name holds a NUL character");
  if (std::filesystem::is_directory(path, status)) fail("it is a folder");
  const std::unique_ptr<std::FILE, int (*)(std::FILE*)> file(std::fopen(path.c_str(), "rb"), &std::fclose);
  if (!file) fail(std::strerror(errno));
  std::string text;
  char part[1 << 16];
  while (text.size() <= most_bytes) {
    const std::size_t got = std::fread(part, 1, sizeof part, file.get());
    text.append(part, got);
    if (got < sizeof part) break;
  }
  if (std::ferror(file.get()) != 0) fail(std::strerror(errno));
  if (text.size() > most_bytes) text.resize(most_bytes + 1);
  return text;
}

}  // namespace wanewall
