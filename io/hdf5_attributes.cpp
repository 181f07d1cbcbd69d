// Errors and attributes of HDF5 objects.
#include <fmt/format.h>

#include <cstring>
#include <utility>

#include "io/errors.hpp"
#include "io/hdf5.hpp"
#include "io/hdf5_context.hpp"
#include "io/hdf5_types.hpp"

namespace wanewall::hdf5 {
namespace {

constexpr std::size_t largest_attribute_bytes = std::size_t{1} << 20;

herr_t collect_reason(unsigned, const H5E_error2_t* error, void* data) {
  try {
    auto& reasons = *static_cast<std::string*>(data);
    if (error->desc == nullptr || *error->desc == '\0') return 0;
    std::string reason = error->desc;
    for (char& c : reason)
      if (c == '\n') c = ' ';
    reasons += (reasons.empty() ? "" : "; ") + reason;
    return 0;
  } catch (const std::bad_alloc&) {
    return -1;
  }
}

/// HDF5's error stack in one line, from the cause outwards.
std::string reasons_of_hdf5() {
  std::string reasons;
  H5Ewalk2(H5E_DEFAULT, H5E_WALK_UPWARD, collect_reason, &reasons);
  return reasons.empty() ? "no reason given" : reasons;
}

/// An attribute opened for reading.
struct Attribute {
  Handle handle, type;
  std::size_t entries = 0;
};

template <class T>
Attribute open_attribute(hid_t object, const std::string& name, const Object& owner, const Context& context) {
  const std::string what = "reading attribute " + name + " of";
  Attribute a;
  a.handle =
      Handle(context.checked(H5Aopen(object, name.c_str(), H5P_DEFAULT), what, owner.where()), H5Aclose);
  a.type = Handle(context.checked(H5Aget_type(a.handle.get()), what, owner.where()), H5Tclose);
  require_readable_as<T>(a.type.get(), owner);
  const Handle space(context.checked(H5Aget_space(a.handle.get()), what, owner.where()), H5Sclose);
  const hssize_t entries = context.checked(H5Sget_simple_extent_npoints(space.get()), what, owner.where());
  const std::size_t bytes = H5Tget_size(a.type.get());
  a.entries = static_cast<std::size_t>(entries);
  if (bytes == 0 || a.entries > largest_attribute_bytes / bytes)
    owner.refuse("attribute " + name + " is too large to be true");
  return a;
}

template <class T>
std::vector<T> read_attribute(hid_t object, const std::string& name, const Object& owner,
                              const Context& context) {
  const Attribute a = open_attribute<T>(object, name, owner, context);
  const std::string what = "reading attribute " + name + " of";
  if constexpr (std::is_same_v<T, std::string>) {
    const std::size_t bytes = H5Tget_size(a.type.get());
    std::vector<char> packed(a.entries * bytes);
    context.checked(H5Aread(a.handle.get(), a.type.get(), packed.data()), what, owner.where());
    return unpacked_texts(packed, bytes);
  } else {
    const Handle memory_type = memory_type_of<T>();
    std::vector<T> values(a.entries);
    context.checked(H5Aread(a.handle.get(), memory_type.get(), values.data()), what, owner.where());
    return values;
  }
}

template <class T>
T only_one(const std::vector<T>& values, const std::string& name, const Object& owner) {
  if (values.size() != 1)
    owner.refuse(fmt::format("attribute {} has {} entries instead of one", name, values.size()));
  return values.front();
}

void write_attribute(hid_t object, const std::string& name, hid_t file_type, hid_t memory_type, hid_t space,
                     const void* data, const Context& context, const std::string& where) {
  const std::string what = "writing attribute " + name + " of";
  const Handle attribute(
      context.checked(H5Acreate2(object, name.c_str(), file_type, space, H5P_DEFAULT, H5P_DEFAULT), what,
                      where),
      H5Aclose);
  if (data != nullptr)  // HDF5 refuses a null pointer even where there is nothing to write
    context.checked(H5Awrite(attribute.get(), memory_type, data), what, where);
}

Handle scalar_space(const Context& context, const std::string& where) {
  return Handle(context.checked(H5Screate(H5S_SCALAR), "preparing an attribute of", where), H5Sclose);
}

Handle list_space(std::size_t entries, const Context& context, const std::string& where) {
  const hsize_t extent = entries;
  return Handle(context.checked(H5Screate_simple(1, &extent, nullptr), "preparing an attribute of", where),
                H5Sclose);
}

}  // namespace

Context::Context(std::string file_path) : path(std::move(file_path)) {
  H5Eset_auto2(H5E_DEFAULT, nullptr, nullptr);
}

void Context::fail(const std::string& doing, const std::string& where) const {
  if (disk && disk->failure() != 0)
    throw FileError(fmt::format("{}: cannot write: {}", path, std::strerror(disk->failure())));
  throw FileError(fmt::format("{}: HDF5 failed while {} {}: {}", path, doing, where, reasons_of_hdf5()));
}

Object::Object(Handle handle, std::shared_ptr<Context> context, std::string where)
    : handle_(std::move(handle)), context_(std::move(context)), where_(std::move(where)) {}

void Object::refuse(const std::string& why) const {
  throw FileError(fmt::format("{}: {} is damaged or foreign: {}", context_->path, where_, why));
}

void Object::set_text(const std::string& name, const std::string& value) {
  const std::vector<std::string> values{value};
  const Handle type = file_type_for(values);
  const std::vector<char> packed = packed_texts(values, H5Tget_size(type.get()));
  write_attribute(id(), name, type.get(), type.get(), scalar_space(*context_, where_).get(), packed.data(),
                  *context_, where_);
}

void Object::set_texts(const std::string& name, const std::vector<std::string>& values) {
  const Handle type = file_type_for(values);
  const std::vector<char> packed = packed_texts(values, H5Tget_size(type.get()));
  write_attribute(id(), name, type.get(), type.get(), list_space(values.size(), *context_, where_).get(),
                  packed.data(), *context_, where_);
}

void Object::set_number(const std::string& name, double value) {
  write_attribute(id(), name, H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, scalar_space(*context_, where_).get(),
                  &value, *context_, where_);
}

void Object::set_numbers(const std::string& name, const std::vector<double>& values) {
  write_attribute(id(), name, H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE,
                  list_space(values.size(), *context_, where_).get(), values.data(), *context_, where_);
}

void Object::set_integer(const std::string& name, std::int64_t value) {
  write_attribute(id(), name, H5T_STD_I64LE, H5T_NATIVE_INT64, scalar_space(*context_, where_).get(), &value,
                  *context_, where_);
}

void Object::set_integers(const std::string& name, const std::vector<std::int64_t>& values) {
  write_attribute(id(), name, H5T_STD_I64LE, H5T_NATIVE_INT64,
                  list_space(values.size(), *context_, where_).get(), values.data(), *context_, where_);
}

void Object::set_uint32(const std::string& name, std::uint32_t value) {
  write_attribute(id(), name, H5T_STD_U32LE, H5T_NATIVE_UINT32, scalar_space(*context_, where_).get(), &value,
                  *context_, where_);
}

bool Object::has_attribute(const std::string& name) const {
  return context_->checked(H5Aexists(id(), name.c_str()), "looking for attribute " + name + " of", where_) >
         0;
}

std::string Object::text(const std::string& name) const {
  return only_one(texts(name), name, *this);
}

std::vector<std::string> Object::texts(const std::string& name) const {
  return read_attribute<std::string>(id(), name, *this, *context_);
}

double Object::number(const std::string& name) const {
  return only_one(numbers(name), name, *this);
}

std::vector<double> Object::numbers(const std::string& name) const {
  return read_attribute<double>(id(), name, *this, *context_);
}

std::int64_t Object::integer(const std::string& name) const {
  return only_one(integers(name), name, *this);
}

std::vector<std::int64_t> Object::integers(const std::string& name) const {
  return read_attribute<std::int64_t>(id(), name, *this, *context_);
}

}  // namespace wanewall::hdf5
