// How our types are stored in HDF5 files, and which stored types may be read as them.
#pragma once

#include <hdf5.h>

#include <cstdint>
#include <string>
#include <vector>

#include "io/hdf5.hpp"

namespace wanewall::hdf5 {

/// The type of T in memory; not for texts.
template <class T>
Handle memory_type_of();

/// The type in which values are stored: little-endian, fixed-length texts as long as the longest.
template <class T>
Handle file_type_for(const std::vector<T>& values);

Entry entry_of_type(hid_t type);

/// Throws a FileError about the object unless entries of the stored type can be read as T.
template <class T>
void require_readable_as(hid_t stored_type, const Object& object);

/// Texts one after the other, each filled up with zeros to `bytes` characters, and back.
std::vector<char> packed_texts(const std::vector<std::string>& texts, std::size_t bytes);
std::vector<std::string> unpacked_texts(const std::vector<char>& packed, std::size_t bytes);

/// Keeps the attributes of a new object in its header, however many there are: faster and far smaller than a
/// heap.
void keep_attributes_together(hid_t creation_properties);

std::string member_path(const std::string& parent, const std::string& name);

}  // namespace wanewall::hdf5
