#include "solver/fields.hpp"

#include <algorithm>

namespace wanewall {
namespace {

// Loads and stores whose addresses agree modulo 4 KiB are taken for the same address by the processor's store
// buffer. Fields that start at different lines of a page do not meet; 11 lines apart, all six stay clear of
// one another.
constexpr std::size_t lines_between_fields = 11;

template <class Real>
constexpr std::size_t per_line() {
  return cache_line_bytes / sizeof(Real);
}

// One line in front for the value before k = 0 of the first row, the stagger, and one line behind.
template <class Real>
constexpr std::size_t slack() {
  return (2 + 6 * lines_between_fields) * per_line<Real>();
}

}  // namespace

RowLayout make_row_layout(const Lattice& lattice, std::size_t bytes_per_value) {
  const auto line = static_cast<std::ptrdiff_t>(cache_line_bytes / bytes_per_value);
  RowLayout layout;
  layout.nx = lattice.cells(Axis::x);
  layout.ny = lattice.cells(Axis::y);
  layout.nz = lattice.cells(Axis::z);
  layout.row = (layout.nz + 1 + line - 1) / line * line;
  layout.plane = layout.row * (layout.ny + 1);
  const auto page = static_cast<std::ptrdiff_t>(4096 / bytes_per_value);
  if (layout.plane % page == 0) layout.plane += line;
  return layout;
}

template <class Real>
Fields<Real>::Fields(const RowLayout& layout) : layout_(layout) {
  for (std::size_t c = 0; c < 6; ++c) {
    memory_[c] = AlignedArray<Real>(layout.size() + slack<Real>());
    first_[c] = memory_[c].data() + (1 + c * lines_between_fields) * per_line<Real>();
  }
}

template <class Real>
void Fields<Real>::zero_planes(int i_begin, int i_end) {
  if (i_end <= i_begin) return;
  for (std::size_t c = 0; c < 6; ++c) {
    Real* begin = i_begin == 0 ? memory_[c].data() : first_[c] + layout_.at(i_begin, 0);
    Real* end =
        i_end == layout_.nx + 1 ? memory_[c].data() + memory_[c].size() : first_[c] + layout_.at(i_end, 0);
    std::fill(begin, end, Real(0));
  }
}

template <class Real>
std::size_t Fields<Real>::bytes(const RowLayout& layout) {
  return 6 * (layout.size() + slack<Real>()) * sizeof(Real);
}

template class Fields<float>;
template class Fields<double>;

}  // namespace wanewall
