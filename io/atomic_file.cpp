#include "io/atomic_file.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/stat.h>
#include <unistd.h>

#include <atomic>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>

#include "io/errors.hpp"

namespace wanewall {
namespace {

std::string folder_of(const std::string& path) {
  const std::string folder = std::filesystem::path(path).parent_path().string();
  return folder.empty() ? "." : folder;
}

std::string unused_name_beside(const std::string& path) {
  static std::atomic<int> counter{0};
  return fmt::format("{}.{}-{}.part", path, ::getpid(), counter++);
}

}  // namespace

AtomicFile::AtomicFile(const std::string& final_path) : final_path_(final_path) {
  if (std::filesystem::path(final_path).filename().empty())
    throw FileError(fmt::format("{}: cannot write: this names no file", final_path));
  struct stat status {};
  if (::stat(final_path.c_str(), &status) == 0 && !S_ISREG(status.st_mode))
    throw FileError(fmt::format("{}: cannot write: {} / give the name of a file", final_path,
                                S_ISDIR(status.st_mode) ? "it is a folder" : "it is not a regular file"));
  constexpr int attempts = 100;
  for (int attempt = 0; attempt < attempts && descriptor_ < 0; ++attempt) {
    temporary_path_ = unused_name_beside(final_path);
    descriptor_ = ::open(temporary_path_.c_str(), O_RDWR | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    if (descriptor_ < 0 && errno != EEXIST) break;
  }
  if (descriptor_ < 0) fail(fmt::format("cannot create a file in folder {}", folder_of(final_path)), errno);
}

AtomicFile::~AtomicFile() {
  if (descriptor_ < 0) return;
  ::close(descriptor_);
  ::unlink(temporary_path_.c_str());
}

void AtomicFile::fail(const std::string& doing, int error_number) const {
  throw FileError(fmt::format("{}: {}: {}", final_path_, doing, std::strerror(error_number)));
}

void AtomicFile::write(std::string_view text) {
  while (!text.empty()) {
    const ssize_t written = ::write(descriptor_, text.data(), text.size());
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) fail("cannot write", errno);
    text.remove_prefix(static_cast<std::size_t>(written));
  }
}

void AtomicFile::commit() {
  if (::fsync(descriptor_) != 0) fail("cannot bring the data to the disk", errno);
  const int closed = ::close(descriptor_);
  const int close_error = errno;
  descriptor_ = -1;
  if (closed != 0) {
    ::unlink(temporary_path_.c_str());
    fail("cannot close", close_error);
  }
  if (std::rename(temporary_path_.c_str(), final_path_.c_str()) != 0) {
    const int rename_error = errno;
    ::unlink(temporary_path_.c_str());
    fail(fmt::format("cannot rename {} to it", temporary_path_), rename_error);
  }
  // The new name survives a power cut only once the folder is on the disk too. Some file systems cannot do
  // that and say so; the file itself is safe by then, so that is no failure.
  const int folder = ::open(folder_of(final_path_).c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (folder >= 0) {
    ::fsync(folder);
    ::close(folder);
  }
}

void write_atomically(const std::string& path, std::string_view text) {
  AtomicFile file(path);
  file.write(text);
  file.commit();
}

}  // namespace wanewall
