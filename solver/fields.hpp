// The six fields as rows along z.
//
// E is stored in V/m; H is stored as eta0 H, also in V/m, so that both updates carry the same numbers. Row
// (i, j) of a component holds k = 0 .. nz, padded to whole cache lines; entries that do not exist on the
// lattice stay zero.
#pragma once

#include <array>
#include <span>

#include "geometry/lattice.hpp"
#include "solver/aligned_array.hpp"

namespace wanewall {

/// Where rows lie in memory [elements].
struct RowLayout {
  int nx = 0, ny = 0, nz = 0;  ///< cells; rows exist for i = 0..nx, j = 0..ny
  std::ptrdiff_t row = 0;      ///< from row j to j + 1; whole cache lines
  std::ptrdiff_t plane = 0;    ///< from row i to i + 1

  std::ptrdiff_t at(int i, int j) const { return i * plane + j * row; }
  std::size_t size() const { return static_cast<std::size_t>(plane) * static_cast<std::size_t>(nx + 1); }
};
RowLayout make_row_layout(const Lattice& lattice, std::size_t bytes_per_value);

template <class Real>
class Fields {
 public:
  /// Memory is left untouched: zero_planes() must cover every plane before use, called by the threads that
  /// will work on them.
  explicit Fields(const RowLayout& layout);
  void zero_planes(int i_begin, int i_end);

  Real* row(Component c, int i, int j) {
    return first_[static_cast<std::size_t>(index_of(c))] + layout_.at(i, j);
  }
  const Real* row(Component c, int i, int j) const {
    return first_[static_cast<std::size_t>(index_of(c))] + layout_.at(i, j);
  }
  /// Row (0, 0); row (i, j) is layout().at(i, j) further on.
  Real* first(Component c) { return first_[static_cast<std::size_t>(index_of(c))]; }
  const RowLayout& layout() const { return layout_; }
  /// All values of a component, padding and entries that do not exist included.
  std::span<Real> values(Component c) { return {first(c), layout_.size()}; }
  static std::size_t bytes(const RowLayout& layout);

 private:
  RowLayout layout_;
  std::array<AlignedArray<Real>, 6> memory_;
  std::array<Real*, 6> first_{};
};

}  // namespace wanewall
