#include "io/hdf5_disk.hpp"

#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <exception>
#include <functional>
#include <limits>
#include <new>

namespace wanewall::hdf5 {

void Disk::write(std::size_t at, const unsigned char* data, std::size_t size) {
  while (size > 0 && failure_ == 0) {
    const ssize_t written = ::pwrite(descriptor_, data, size, static_cast<off_t>(at));
    if (written < 0 && errno == EINTR) continue;
    if (written <= 0) {
      failure_ = written < 0 ? errno : EIO;
      break;
    }
    at += static_cast<std::size_t>(written);
    data += written;
    size -= static_cast<std::size_t>(written);
  }
  if (size > 0) write_pages(at, data, size);
}

void Disk::write_pages(std::size_t at, const unsigned char* data, std::size_t size) {
  while (size > 0) {
    const std::size_t number = at / page_bytes;
    const std::size_t within = at % page_bytes;
    const std::size_t part = std::min(size, page_bytes - within);
    Page& page = pages_[number];
    if (page.empty()) {
      page.resize(page_bytes);
      read_file(number * page_bytes, page.data(), page_bytes);
    }
    std::memcpy(page.data() + within, data, part);
    at += part;
    data += part;
    size -= part;
  }
}

bool Disk::read_file(std::size_t at, unsigned char* data, std::size_t size) const {
  while (size > 0) {
    const ssize_t got = ::pread(descriptor_, data, size, static_cast<off_t>(at));
    if (got < 0 && errno == EINTR) continue;
    if (got < 0) return false;
    if (got == 0) {
      std::memset(data, 0, size);
      return true;
    }
    at += static_cast<std::size_t>(got);
    data += got;
    size -= static_cast<std::size_t>(got);
  }
  return true;
}

bool Disk::read(std::size_t at, unsigned char* data, std::size_t size) {
  if (!read_file(at, data, size)) return false;
  for (auto page = pages_.lower_bound(at / page_bytes); page != pages_.end(); ++page) {
    const std::size_t begin = page->first * page_bytes;
    if (begin >= at + size) break;
    const std::size_t from = std::max(begin, at);
    const std::size_t to = std::min(begin + page_bytes, at + size);
    std::memcpy(data + (from - at), page->second.data() + (from - begin), to - from);
  }
  return true;
}

void Disk::set_length(std::size_t length) {
  if (failure_ == 0 && ::ftruncate(descriptor_, static_cast<off_t>(length)) != 0) failure_ = errno;
}

std::size_t Disk::length() const {
  struct stat status {};
  return ::fstat(descriptor_, &status) == 0 ? static_cast<std::size_t>(status.st_size) : 0;
}

namespace {

struct DriverFile {
  H5FD_t base;  // HDF5's own part comes first
  Disk* disk;
  haddr_t end_of_allocation;
};

struct DriverInfo {
  Disk* disk;
};

DriverFile* mine(H5FD_t* file) {
  return reinterpret_cast<DriverFile*>(file);
}
const DriverFile* mine(const H5FD_t* file) {
  return reinterpret_cast<const DriverFile*>(file);
}

// Called by C code, which no exception may cross.
template <class Work>
herr_t guarded(const Work& work) {
  try {
    return work() ? 0 : -1;
  } catch (const std::exception&) {
    return -1;
  }
}

H5FD_t* open_file(const char*, unsigned, hid_t access_list, haddr_t) {
  const auto* info = static_cast<const DriverInfo*>(H5Pget_driver_info(access_list));
  if (info == nullptr) return nullptr;
  auto* file = new (std::nothrow) DriverFile{};
  if (file == nullptr) return nullptr;
  file->disk = info->disk;
  return &file->base;
}

herr_t close_file(H5FD_t* file) {
  delete mine(file);
  return 0;
}

int compare_files(const H5FD_t* a, const H5FD_t* b) {
  const std::less<const Disk*> before;
  return before(mine(a)->disk, mine(b)->disk) ? -1 : before(mine(b)->disk, mine(a)->disk) ? 1 : 0;
}

herr_t query_features(const H5FD_t*, unsigned long* flags) {
  if (flags != nullptr)
    *flags = H5FD_FEAT_AGGREGATE_METADATA | H5FD_FEAT_ACCUMULATE_METADATA | H5FD_FEAT_DATA_SIEVE |
             H5FD_FEAT_AGGREGATE_SMALLDATA | H5FD_FEAT_DEFAULT_VFD_COMPATIBLE;
  return 0;
}

haddr_t get_end_of_allocation(const H5FD_t* file, H5FD_mem_t) {
  return mine(file)->end_of_allocation;
}

herr_t set_end_of_allocation(H5FD_t* file, H5FD_mem_t, haddr_t address) {
  mine(file)->end_of_allocation = address;
  return 0;
}

haddr_t get_end_of_file(const H5FD_t* file, H5FD_mem_t) {
  return mine(file)->disk->length();
}

herr_t read_file(H5FD_t* file, H5FD_mem_t, hid_t, haddr_t at, size_t size, void* data) {
  return guarded([&] { return mine(file)->disk->read(at, static_cast<unsigned char*>(data), size); });
}

herr_t write_file(H5FD_t* file, H5FD_mem_t, hid_t, haddr_t at, size_t size, const void* data) {
  return guarded([&] {
    mine(file)->disk->write(at, static_cast<const unsigned char*>(data), size);
    return true;
  });
}

herr_t truncate_file(H5FD_t* file, hid_t, hbool_t) {
  mine(file)->disk->set_length(mine(file)->end_of_allocation);
  return 0;
}

H5FD_class_t make_driver() {
  H5FD_class_t driver{};
  driver.name = "wanewall_disk";
  driver.maxaddr = static_cast<haddr_t>(std::numeric_limits<off_t>::max());
  driver.fc_degree = H5F_CLOSE_WEAK;
  driver.fapl_size = sizeof(DriverInfo);
  driver.open = open_file;
  driver.close = close_file;
  driver.cmp = compare_files;
  driver.query = query_features;
  driver.get_eoa = get_end_of_allocation;
  driver.set_eoa = set_end_of_allocation;
  driver.get_eof = get_end_of_file;
  driver.read = read_file;
  driver.write = write_file;
  driver.truncate = truncate_file;
  const H5FD_mem_t kinds[] = H5FD_FLMAP_DICHOTOMY;
  std::copy(std::begin(kinds), std::end(kinds), std::begin(driver.fl_map));
  return driver;
}

hid_t registered_driver() {
  static const H5FD_class_t driver = make_driver();
  static hid_t id = -1;
  // The library forgets its drivers when it is shut down and started again.
  if (id < 0 || H5Iis_valid(id) <= 0) id = H5FDregister(&driver);
  return id;
}

}  // namespace

herr_t set_disk(hid_t access_list, Disk& disk) {
  const hid_t driver = registered_driver();
  const DriverInfo info{&disk};
  return driver < 0 ? -1 : H5Pset_driver(access_list, driver, &info);
}

}  // namespace wanewall::hdf5
