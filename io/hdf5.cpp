#include "io/hdf5.hpp"

#include <fmt/format.h>
#ifdef __GLIBC__
#include <malloc.h>
#endif

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <limits>
#include <new>
#include <numeric>
#include <utility>

#include "io/errors.hpp"
#include "io/hdf5_context.hpp"
#include "io/hdf5_types.hpp"

namespace wanewall::hdf5 {
namespace {

constexpr unsigned deflate_level = 1;  // field values hardly get smaller with more
constexpr std::size_t largest_chunk_bytes = std::size_t{1} << 20;
// Deflate cannot do better than about 1032 to 1. A dataset that claims more than this times its stored size
// is damaged, and memory must not be taken for it.
constexpr std::size_t largest_compression = 1100;

/// Halves the longest axis until a chunk is small enough to be read for a few of its entries.
Shape chunk_of(const Shape& shape, std::size_t entry_bytes) {
  Shape chunk = shape;
  while (n_entries(chunk) * entry_bytes > largest_chunk_bytes) {
    const auto longest = std::max_element(chunk.begin(), chunk.end());
    if (*longest == 1) break;
    *longest = (*longest + 1) / 2;
  }
  return chunk;
}

std::vector<hsize_t> extents_of(const Shape& shape) {
  return {shape.begin(), shape.end()};
}

/// Tells in plain words what HDF5 would tell at length, and spares it files that would make it wait.
void require_readable_file(const std::string& path) {
  std::error_code error;
  const auto status = std::filesystem::status(path, error);
  if (!std::filesystem::exists(status))
    throw FileError(fmt::format("{}: cannot read: {}", path, std::strerror(error ? error.value() : ENOENT)));
  if (!std::filesystem::is_regular_file(status))
    throw FileError(fmt::format("{}: cannot read: it is not a regular file", path));
}

/// zlib takes a quarter of a megabyte for every chunk and gives it back; glibc would return it to the system
/// each time, which made small snapshots seven times slower to write.
void keep_freed_memory() {
#ifdef __GLIBC__
  constexpr int mebibyte = 1 << 20;
  mallopt(M_TRIM_THRESHOLD, 64 * mebibyte);
  mallopt(M_TOP_PAD, 4 * mebibyte);
  mallopt(M_MMAP_THRESHOLD, 32 * mebibyte);  // where glibc's own rule would end up
#endif
}

herr_t collect_name(hid_t, const char* name, const H5L_info_t*, void* data) {
  try {
    static_cast<std::vector<std::string>*>(data)->emplace_back(name);
    return 0;
  } catch (const std::bad_alloc&) {
    return -1;
  }
}

}  // namespace

std::size_t n_entries(const Shape& shape) {
  std::size_t product = 1;
  for (const std::size_t extent : shape) {
    if (extent != 0 && product > std::numeric_limits<std::size_t>::max() / extent)
      return std::numeric_limits<std::size_t>::max();
    product *= extent;
  }
  return product;
}

Handle& Handle::operator=(Handle&& other) noexcept {
  if (this != &other) {
    reset();
    id_ = std::exchange(other.id_, -1);
    closer_ = other.closer_;
  }
  return *this;
}

void Handle::reset() {
  if (id_ >= 0 && closer_ != nullptr) closer_(id_);
  id_ = -1;
}

Shape Dataset::shape() const {
  const Handle space(context_->checked(H5Dget_space(id()), "reading the shape of", where_), H5Sclose);
  const int rank = context_->checked(H5Sget_simple_extent_ndims(space.get()), "reading the shape of", where_);
  std::vector<hsize_t> extents(static_cast<std::size_t>(rank));
  context_->checked(H5Sget_simple_extent_dims(space.get(), extents.data(), nullptr), "reading the shape of",
                    where_);
  return {extents.begin(), extents.end()};
}

Entry Dataset::entry() const {
  const Handle type(context_->checked(H5Dget_type(id()), "reading the type of", where_), H5Tclose);
  return entry_of_type(type.get());
}

template <class T>
std::vector<T> Dataset::read_selected(hid_t memory_space, hid_t file_space, std::size_t entries) const {
  const Handle stored_type(context_->checked(H5Dget_type(id()), "reading the type of", where_), H5Tclose);
  require_readable_as<T>(stored_type.get(), *this);
  const std::size_t stored_entry_bytes = H5Tget_size(stored_type.get());
  const hsize_t stored_bytes = H5Dget_storage_size(id());
  const std::size_t limit = largest_compression * (static_cast<std::size_t>(stored_bytes) + 1);
  if (stored_entry_bytes == 0 || entries > limit / stored_entry_bytes)
    refuse(fmt::format("it claims {} entries of {} bytes but stores only {} bytes", entries,
                       stored_entry_bytes, stored_bytes));
  if constexpr (std::is_same_v<T, std::string>) {
    std::vector<char> bytes(entries * stored_entry_bytes);
    context_->checked(H5Dread(id(), stored_type.get(), memory_space, file_space, H5P_DEFAULT, bytes.data()),
                      "reading", where_);
    return unpacked_texts(bytes, stored_entry_bytes);
  } else {
    const Handle memory_type = memory_type_of<T>();
    std::vector<T> values(entries);
    context_->checked(H5Dread(id(), memory_type.get(), memory_space, file_space, H5P_DEFAULT, values.data()),
                      "reading", where_);
    return values;
  }
}

template <class T>
std::vector<T> Dataset::read() const {
  return read_selected<T>(H5S_ALL, H5S_ALL, n_entries(shape()));
}

template <class T>
std::vector<T> Dataset::read_window(const Shape& begin, const Shape& count) const {
  const Shape whole = shape();
  bool fits = begin.size() == whole.size() && count.size() == whole.size();
  for (std::size_t axis = 0; fits && axis < whole.size(); ++axis)
    fits = count[axis] <= whole[axis] && begin[axis] <= whole[axis] - count[axis];
  if (!fits) refuse("it is smaller than the part that is wanted from it");
  const Handle file_space(context_->checked(H5Dget_space(id()), "reading the shape of", where_), H5Sclose);
  const std::vector<hsize_t> first = extents_of(begin), extents = extents_of(count);
  context_->checked(
      H5Sselect_hyperslab(file_space.get(), H5S_SELECT_SET, first.data(), nullptr, extents.data(), nullptr),
      "selecting in", where_);
  const Handle memory_space(
      context_->checked(H5Screate_simple(static_cast<int>(extents.size()), extents.data(), nullptr),
                        "selecting in", where_),
      H5Sclose);
  return read_selected<T>(memory_space.get(), file_space.get(), n_entries(count));
}

bool Group::has(const std::string& name) const {
  return context_->checked(H5Lexists(id(), name.c_str(), H5P_DEFAULT), "looking for " + name + " in",
                           where_) > 0;
}

std::vector<std::string> Group::names() const {
  H5G_info_t info{};
  context_->checked(H5Gget_info(id(), &info), "listing", where_);
  const Handle properties(context_->checked(H5Gget_create_plist(id()), "listing", where_), H5Pclose);
  unsigned order = 0;
  context_->checked(H5Pget_link_creation_order(properties.get(), &order), "listing", where_);
  const H5_index_t index = (order & H5P_CRT_ORDER_INDEXED) != 0 ? H5_INDEX_CRT_ORDER : H5_INDEX_NAME;
  std::vector<std::string> found;
  context_->checked(H5Literate(id(), index, H5_ITER_INC, nullptr, collect_name, &found), "listing", where_);
  return found;
}

Group Group::group(const std::string& name) const {
  const std::string path = member_path(where_, name);
  Handle handle(context_->checked(H5Gopen2(id(), name.c_str(), H5P_DEFAULT), "opening group", path),
                H5Gclose);
  return Group(std::move(handle), context_, path);
}

Dataset Group::dataset(const std::string& name) const {
  const std::string path = member_path(where_, name);
  Handle handle(context_->checked(H5Dopen2(id(), name.c_str(), H5P_DEFAULT), "opening dataset", path),
                H5Dclose);
  return Dataset(std::move(handle), context_, path);
}

Group Group::create_group(const std::string& name) {
  const std::string path = member_path(where_, name);
  const Handle properties(context_->checked(H5Pcreate(H5P_GROUP_CREATE), "preparing", path), H5Pclose);
  context_->checked(
      H5Pset_link_creation_order(properties.get(), H5P_CRT_ORDER_TRACKED | H5P_CRT_ORDER_INDEXED),
      "preparing", path);
  keep_attributes_together(properties.get());
  Handle handle(context_->checked(H5Gcreate2(id(), name.c_str(), H5P_DEFAULT, properties.get(), H5P_DEFAULT),
                                  "creating group", path),
                H5Gclose);
  return Group(std::move(handle), context_, path);
}

template <class T>
Dataset Group::create(const std::string& name, const Shape& shape, const std::vector<T>& values) {
  const std::string path = member_path(where_, name);
  if (shape.empty() || values.size() != n_entries(shape))
    throw std::logic_error(
        fmt::format("{}: {} values for a shape of {} entries", path, values.size(), n_entries(shape)));
  const Handle file_type = file_type_for(values);
  const std::vector<hsize_t> extents = extents_of(shape);
  const Handle space(
      context_->checked(H5Screate_simple(static_cast<int>(extents.size()), extents.data(), nullptr),
                        "preparing", path),
      H5Sclose);
  const Handle properties(context_->checked(H5Pcreate(H5P_DATASET_CREATE), "preparing", path), H5Pclose);
  keep_attributes_together(properties.get());
  if (!values.empty()) {  // an empty dataset cannot be cut into chunks
    const std::vector<hsize_t> chunk = extents_of(chunk_of(shape, H5Tget_size(file_type.get())));
    context_->checked(H5Pset_chunk(properties.get(), static_cast<int>(chunk.size()), chunk.data()),
                      "preparing", path);
    context_->checked(H5Pset_shuffle(properties.get()), "preparing", path);
    // Deflate also puts a checksum on every chunk, which HDF5 compares when it reads.
    context_->checked(H5Pset_deflate(properties.get(), deflate_level), "preparing", path);
  }
  Handle handle(context_->checked(H5Dcreate2(id(), name.c_str(), file_type.get(), space.get(), H5P_DEFAULT,
                                             properties.get(), H5P_DEFAULT),
                                  "creating dataset", path),
                H5Dclose);
  Dataset dataset(std::move(handle), context_, path);
  if constexpr (std::is_same_v<T, std::string>) {
    const std::vector<char> bytes = packed_texts(values, H5Tget_size(file_type.get()));
    context_->checked(H5Dwrite(dataset.id(), file_type.get(), H5S_ALL, H5S_ALL, H5P_DEFAULT, bytes.data()),
                      "writing", path);
  } else {
    const Handle memory_type = memory_type_of<T>();
    context_->checked(H5Dwrite(dataset.id(), memory_type.get(), H5S_ALL, H5S_ALL, H5P_DEFAULT, values.data()),
                      "writing", path);
  }
  return dataset;
}

Dataset Group::create_text(const std::string& name, const std::string& text) {
  return create(name, {1}, std::vector<std::string>{text});
}

File::File(Handle file, Handle root, std::shared_ptr<Context> context)
    : Group(std::move(root), std::move(context), "/"), file_(std::move(file)) {}

File File::open(const std::string& path) {
  auto context = std::make_shared<Context>(path);
  require_readable_file(path);
  const Handle access(context->checked(H5Pcreate(H5P_FILE_ACCESS), "preparing to read", "it"), H5Pclose);
  // A record is never changed under its name, so there is nothing to lock; some network file systems cannot.
  context->checked(H5Pset_file_locking(access.get(), false, true), "preparing to read", "it");
  context->checked(H5Pset_fclose_degree(access.get(), H5F_CLOSE_STRONG), "preparing to read", "it");
  Handle file(context->checked(H5Fopen(path.c_str(), H5F_ACC_RDONLY, access.get()), "opening", "it"),
              H5Fclose);
  Handle root(context->checked(H5Gopen2(file.get(), "/", H5P_DEFAULT), "opening group", "/"), H5Gclose);
  return File(std::move(file), std::move(root), std::move(context));
}

File File::create(AtomicFile& target) {
  keep_freed_memory();
  auto context = std::make_shared<Context>(target.final_path());
  context->disk = std::make_unique<Disk>(target.descriptor());
  const Handle access(context->checked(H5Pcreate(H5P_FILE_ACCESS), "preparing to write", "it"), H5Pclose);
  context->checked(set_disk(access.get(), *context->disk), "preparing to write", "it");
  // Chunks are written whole, so that a cache of them would only put off the news of a full disk.
  context->checked(H5Pset_cache(access.get(), 0, 0, 0, 0.0), "preparing to write", "it");
  context->checked(H5Pset_libver_bounds(access.get(), H5F_LIBVER_V110, H5F_LIBVER_V110), "preparing to write",
                   "it");
  context->checked(H5Pset_fclose_degree(access.get(), H5F_CLOSE_STRONG), "preparing to write", "it");
  const Handle creation(context->checked(H5Pcreate(H5P_FILE_CREATE), "preparing to write", "it"), H5Pclose);
  context->checked(H5Pset_link_creation_order(creation.get(), H5P_CRT_ORDER_TRACKED | H5P_CRT_ORDER_INDEXED),
                   "preparing to write", "it");
  Handle file(context->checked(
                  H5Fcreate(target.temporary_path().c_str(), H5F_ACC_TRUNC, creation.get(), access.get()),
                  "creating", "it"),
              H5Fclose);
  Handle root(context->checked(H5Gopen2(file.get(), "/", H5P_DEFAULT), "opening group", "/"), H5Gclose);
  return File(std::move(file), std::move(root), std::move(context));
}

void File::close() {
  handle_.reset();
  const hid_t file = file_.release();
  context_->checked(file >= 0 ? H5Fclose(file) : 0, "closing", "it");
}

#define WANEWALL_FOR_ENTRY(T)                                                        \
  template std::vector<T> Dataset::read<T>() const;                                  \
  template std::vector<T> Dataset::read_window<T>(const Shape&, const Shape&) const; \
  template Dataset Group::create<T>(const std::string&, const Shape&, const std::vector<T>&);
WANEWALL_FOR_ENTRY(float)
WANEWALL_FOR_ENTRY(double)
WANEWALL_FOR_ENTRY(std::int64_t)
WANEWALL_FOR_ENTRY(std::complex<float>)
WANEWALL_FOR_ENTRY(std::complex<double>)
WANEWALL_FOR_ENTRY(std::string)
#undef WANEWALL_FOR_ENTRY

}  // namespace wanewall::hdf5
