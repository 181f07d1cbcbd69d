// Copies of parts of rows, taken by the rows themselves as they pass a step. Every recorder is built on
// these.
#pragma once

#include <cstdint>
#include <vector>

#include "geometry/lattice.hpp"
#include "solver/fields.hpp"

namespace wanewall {

/// A box of one component: indices first + n stride, n < count, along each axis. On a periodic axis the image
/// of the first node is taken from the first node.
struct CaptureBox {
  Component component = Component::ex;
  Index3 first{};
  Index3 count{1, 1, 1};
  int stride = 1;
  std::size_t size() const {
    return static_cast<std::size_t>(count[0]) * static_cast<std::size_t>(count[1]) *
           static_cast<std::size_t>(count[2]);
  }
};

template <class Real>
class Captures {
 public:
  explicit Captures(const Lattice& lattice) : lattice_(lattice) {}

  /// Registers a box; returns its number. All boxes must be added before freeze().
  int add(const CaptureBox& box);
  void freeze();

  /// Where box `id` puts its values from now on, order [x][y][z], in stored units; null: nowhere. Set between
  /// steps.
  void aim(int id, Real* target) { targets_[static_cast<std::size_t>(id)] = target; }

  /// Called by a row when its three components of E (or H) are complete.
  void take(bool electric, int i, int j, const Fields<Real>& fields) const {
    const auto& row_start = electric ? e_start_ : h_start_;
    const std::size_t row = static_cast<std::size_t>(i) * n_j_ + static_cast<std::size_t>(j);
    for (std::uint32_t n = row_start[row]; n < row_start[row + 1]; ++n) {
      const Entry& entry = (electric ? e_entries_ : h_entries_)[n];
      if (Real* target = targets_[entry.box]) copy(entry, i, j, fields, target);
    }
  }
  std::size_t bytes() const;

 private:
  struct Entry {
    std::uint32_t box;
    std::uint32_t row_in_box;
  };
  void copy(const Entry& entry, int i, int j, const Fields<Real>& fields, Real* target) const;

  Lattice lattice_;
  std::size_t n_j_ = 0;
  std::vector<CaptureBox> boxes_;
  std::vector<Real*> targets_;
  std::vector<std::uint32_t> e_start_, h_start_;
  std::vector<Entry> e_entries_, h_entries_;
};

}  // namespace wanewall
