// Memory for rows: whole cache lines; large arrays in huge pages where the system has them, left untouched so
// that the thread that first writes a row owns its page.
#pragma once

#include <sys/mman.h>

#include <cstddef>
#include <cstdlib>
#include <memory>
#include <new>

namespace wanewall {

inline constexpr std::size_t cache_line_bytes = 64;

template <class T>
class AlignedArray {
 public:
  AlignedArray() = default;
  explicit AlignedArray(std::size_t size) : size_(size) {
    constexpr std::size_t huge_page = std::size_t{1} << 21;
    const bool is_large = size * sizeof(T) >= huge_page;
    const std::size_t unit = is_large ? huge_page : cache_line_bytes;
    const std::size_t bytes = (size * sizeof(T) + unit - 1) / unit * unit;
    if (bytes == 0) return;
    data_.reset(static_cast<T*>(std::aligned_alloc(unit, bytes)));
    if (!data_) throw std::bad_alloc();
    if (is_large) madvise(data_.get(), bytes, MADV_HUGEPAGE);
  }
  T* data() { return data_.get(); }
  const T* data() const { return data_.get(); }
  T& operator[](std::size_t i) { return data_.get()[i]; }
  const T& operator[](std::size_t i) const { return data_.get()[i]; }
  std::size_t size() const { return size_; }

 private:
  struct Free {
    void operator()(T* p) const { std::free(p); }
  };
  std::unique_ptr<T, Free> data_;
  std::size_t size_ = 0;
};

}  // namespace wanewall
