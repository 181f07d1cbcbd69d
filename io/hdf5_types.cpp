#include "io/hdf5_types.hpp"

#include <algorithm>
#include <complex>
#include <cstring>
#include <stdexcept>
#include <type_traits>

namespace wanewall::hdf5 {
namespace {

constexpr const char* real_member = "r";
constexpr const char* imaginary_member = "i";

// The calls of this file take only what the program itself has made, so that a failure is a bug of ours or of
// the library, or memory has run out.
hid_t made(hid_t id) {
  if (id < 0) throw std::runtime_error("HDF5 cannot make a data type");
  return id;
}

Handle copy_of(hid_t type) {
  return Handle(made(H5Tcopy(type)), H5Tclose);
}

Handle complex_of(hid_t part, std::size_t part_bytes) {
  Handle type(made(H5Tcreate(H5T_COMPOUND, 2 * part_bytes)), H5Tclose);
  made(H5Tinsert(type.get(), real_member, 0, part));
  made(H5Tinsert(type.get(), imaginary_member, part_bytes, part));
  return type;
}

bool is_ascii(const std::string& text) {
  return std::all_of(text.begin(), text.end(), [](char c) { return static_cast<unsigned char>(c) < 128; });
}

Handle text_type_for(const std::vector<std::string>& texts) {
  std::size_t longest = 1;  // HDF5 has no texts of length zero
  bool ascii = true;
  for (const std::string& text : texts) {
    longest = std::max(longest, text.size());
    ascii = ascii && is_ascii(text);
  }
  Handle type = copy_of(H5T_C_S1);
  made(H5Tset_size(type.get(), longest));
  made(H5Tset_strpad(type.get(), H5T_STR_NULLPAD));
  made(H5Tset_cset(type.get(), ascii ? H5T_CSET_ASCII : H5T_CSET_UTF8));
  return type;
}

bool is_complex(hid_t type) {
  if (H5Tget_class(type) != H5T_COMPOUND || H5Tget_nmembers(type) != 2) return false;
  const int r = H5Tget_member_index(type, real_member);
  const int i = H5Tget_member_index(type, imaginary_member);
  return r >= 0 && i >= 0 && H5Tget_member_class(type, static_cast<unsigned>(r)) == H5T_FLOAT &&
         H5Tget_member_class(type, static_cast<unsigned>(i)) == H5T_FLOAT;
}

}  // namespace

template <>
Handle memory_type_of<float>() {
  return copy_of(H5T_NATIVE_FLOAT);
}
template <>
Handle memory_type_of<double>() {
  return copy_of(H5T_NATIVE_DOUBLE);
}
template <>
Handle memory_type_of<std::int64_t>() {
  return copy_of(H5T_NATIVE_INT64);
}
template <>
Handle memory_type_of<std::complex<float>>() {
  return complex_of(H5T_NATIVE_FLOAT, sizeof(float));
}
template <>
Handle memory_type_of<std::complex<double>>() {
  return complex_of(H5T_NATIVE_DOUBLE, sizeof(double));
}

template <>
Handle file_type_for(const std::vector<float>&) {
  return copy_of(H5T_IEEE_F32LE);
}
template <>
Handle file_type_for(const std::vector<double>&) {
  return copy_of(H5T_IEEE_F64LE);
}
template <>
Handle file_type_for(const std::vector<std::int64_t>&) {
  return copy_of(H5T_STD_I64LE);
}
template <>
Handle file_type_for(const std::vector<std::complex<float>>&) {
  return complex_of(H5T_IEEE_F32LE, 4);
}
template <>
Handle file_type_for(const std::vector<std::complex<double>>&) {
  return complex_of(H5T_IEEE_F64LE, 8);
}
template <>
Handle file_type_for(const std::vector<std::string>& values) {
  return text_type_for(values);
}

Entry entry_of_type(hid_t type) {
  switch (H5Tget_class(type)) {
    case H5T_FLOAT:
      return H5Tget_size(type) == 4 ? Entry::float32 : H5Tget_size(type) == 8 ? Entry::float64 : Entry::other;
    case H5T_INTEGER:
      return Entry::integer;
    case H5T_STRING:
      return H5Tis_variable_str(type) == 0 ? Entry::text : Entry::other;
    case H5T_COMPOUND:
      if (!is_complex(type)) return Entry::other;
      return H5Tget_size(type) == 8    ? Entry::complex_float32
             : H5Tget_size(type) == 16 ? Entry::complex_float64
                                       : Entry::other;
    default:
      return Entry::other;
  }
}

template <class T>
void require_readable_as(hid_t stored_type, const Object& object) {
  const Entry entry = entry_of_type(stored_type);
  if constexpr (std::is_same_v<T, std::string>) {
    if (entry != Entry::text) object.refuse("its entries are not fixed-length texts");
  } else if constexpr (std::is_same_v<T, std::int64_t>) {
    if (entry != Entry::integer) object.refuse("its entries are not whole numbers");
  } else if constexpr (std::is_floating_point_v<T>) {
    if (entry != Entry::float32 && entry != Entry::float64)
      object.refuse("its entries are not numbers of 4 or 8 bytes");
  } else {
    if (entry != Entry::complex_float32 && entry != Entry::complex_float64)
      object.refuse("its entries are not complex numbers");
  }
}
template void require_readable_as<float>(hid_t, const Object&);
template void require_readable_as<double>(hid_t, const Object&);
template void require_readable_as<std::int64_t>(hid_t, const Object&);
template void require_readable_as<std::complex<float>>(hid_t, const Object&);
template void require_readable_as<std::complex<double>>(hid_t, const Object&);
template void require_readable_as<std::string>(hid_t, const Object&);

std::vector<char> packed_texts(const std::vector<std::string>& texts, std::size_t bytes) {
  std::vector<char> packed(texts.size() * bytes, '\0');
  for (std::size_t n = 0; n < texts.size(); ++n)
    std::memcpy(packed.data() + n * bytes, texts[n].data(), std::min(bytes, texts[n].size()));
  return packed;
}

std::vector<std::string> unpacked_texts(const std::vector<char>& packed, std::size_t bytes) {
  std::vector<std::string> texts;
  for (std::size_t at = 0; at + bytes <= packed.size(); at += bytes) {
    const auto* begin = packed.data() + at;
    texts.emplace_back(begin, std::find(begin, begin + bytes, '\0'));
  }
  return texts;
}

void keep_attributes_together(hid_t creation_properties) {
  constexpr unsigned most_in_header = 1000, fewest_outside = 900;
  made(H5Pset_attr_phase_change(creation_properties, most_in_header, fewest_outside));
}

std::string member_path(const std::string& parent, const std::string& name) {
  return parent == "/" ? parent + name : parent + "/" + name;
}

}  // namespace wanewall::hdf5
