#include "solver/recorders/captures.hpp"

#include <algorithm>
#include <stdexcept>

namespace wanewall {
namespace {

/// The row or value that holds an index: on a periodic axis the last node is the first.
int source_index(const Lattice& lattice, Component c, Axis a, int index) {
  const bool image =
      lattice.periodic[static_cast<std::size_t>(index_of(a))] && !is_half(c, a) && index == lattice.cells(a);
  return image ? 0 : index;
}

}  // namespace

template <class Real>
int Captures<Real>::add(int set, const CaptureBox& box) {
  for (Axis a : all_axes) {
    const auto at = static_cast<std::size_t>(index_of(a));
    const IndexRange stored = lattice_.stored(box.component, a);
    const int last = box.first[at] + (box.count[at] - 1) * box.stride;
    if (box.count[at] < 1 || !stored.contains(box.first[at]) || !stored.contains(last))
      throw std::logic_error("a capture reaches beyond the lattice");
  }
  boxes_.push_back(box);
  singles_.push_back(
      {box.component, box.count[2] == 1 ? source_index(lattice_, box.component, Axis::z, box.first[2]) : -1});
  set_of_box_.push_back(static_cast<std::size_t>(set));
  return static_cast<int>(boxes_.size()) - 1;
}

template <class Real>
void Captures<Real>::freeze() {
  n_j_ = static_cast<std::size_t>(lattice_.cells(Axis::y)) + 1;
  for (std::size_t set = 0; set < n_sets_; ++set) {
    e_rows_.push_back(rows_of(true, set));
    h_rows_.push_back(rows_of(false, set));
  }
}

template <class Real>
typename Captures<Real>::Rows Captures<Real>::rows_of(bool electric, std::size_t set) const {
  const std::size_t n_rows = (static_cast<std::size_t>(lattice_.cells(Axis::x)) + 1) * n_j_;
  Rows rows;
  rows.start.assign(n_rows + 1, 0);
  // Two passes: count, then fill.
  std::vector<std::uint32_t> fill;
  for (const bool counting : {true, false}) {
    for (std::size_t b = 0; b < boxes_.size(); ++b) {
      const CaptureBox& box = boxes_[b];
      if (is_electric(box.component) != electric || set_of_box_[b] != set) continue;
      for (int x = 0; x < box.count[0]; ++x) {
        const int i = source_index(lattice_, box.component, Axis::x, box.first[0] + x * box.stride);
        for (int y = 0; y < box.count[1]; ++y) {
          const int j = source_index(lattice_, box.component, Axis::y, box.first[1] + y * box.stride);
          const std::size_t row = static_cast<std::size_t>(i) * n_j_ + static_cast<std::size_t>(j);
          if (counting)
            ++rows.start[row + 1];
          else
            rows.entries[fill[row]++] = {static_cast<std::uint32_t>(b),
                                         static_cast<std::uint32_t>(x * box.count[1] + y)};
        }
      }
    }
    if (counting) {
      for (std::size_t row = 0; row < n_rows; ++row) rows.start[row + 1] += rows.start[row];
      rows.entries.resize(rows.start[n_rows]);
      fill.assign(rows.start.begin(), rows.start.end());
    }
  }
  return rows;
}

template <class Real>
void Captures<Real>::begin_block(int n_steps) {
  targets_.assign(static_cast<std::size_t>(n_steps) * boxes_.size(), nullptr);
  is_aimed_.assign(static_cast<std::size_t>(n_steps) * n_sets_, 0);
}

template <class Real>
void Captures<Real>::aim(int id, int slot, Real* target) {
  const auto box = static_cast<std::size_t>(id), at = static_cast<std::size_t>(slot);
  targets_[at * boxes_.size() + box] = target;
  is_aimed_[at * n_sets_ + set_of_box_[box]] = 1;
}

template <class Real>
bool Captures<Real>::touches(bool electric, int i, int j) const {
  const std::size_t row = static_cast<std::size_t>(i) * n_j_ + static_cast<std::size_t>(j);
  const std::vector<Rows>& sets = electric ? e_rows_ : h_rows_;
  return std::any_of(sets.begin(), sets.end(),
                     [&](const Rows& rows) { return rows.start[row] < rows.start[row + 1]; });
}

template <class Real>
void Captures<Real>::copy(const Entry& entry, int i, int j, const Fields<Real>& fields, Real* target) const {
  const CaptureBox& box = boxes_[entry.box];
  const Real* row = fields.row(box.component, i, j);
  Real* out = target + static_cast<std::size_t>(entry.row_in_box) * static_cast<std::size_t>(box.count[2]);
  const bool has_image = lattice_.periodic[2] && !is_half(box.component, Axis::z);
  for (int z = 0; z < box.count[2]; ++z) {
    const int k = box.first[2] + z * box.stride;
    out[z] = row[has_image && k == lattice_.cells(Axis::z) ? 0 : k];
  }
}

template <class Real>
std::size_t Captures<Real>::bytes() const {
  std::size_t sum = 0;
  for (const std::vector<Rows>* sets : {&e_rows_, &h_rows_})
    for (const Rows& rows : *sets)
      sum += rows.entries.size() * sizeof(Entry) + rows.start.size() * sizeof(std::uint32_t);
  return sum;
}

template class Captures<float>;
template class Captures<double>;

}  // namespace wanewall
