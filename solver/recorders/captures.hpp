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

  /// Boxes that are aimed at the same steps. A step at which a set has no aim costs its rows nothing.
  int new_set() { return static_cast<int>(n_sets_++); }
  /// Registers a box; returns its number. All boxes must be added before freeze().
  int add(int set, const CaptureBox& box);
  void freeze();

  /// Forgets all aims and makes room for those of a block. Between blocks, before the recorders.
  void begin_block(int n_steps);
  /// Where box `id` puts its values at the block's step `slot`, order [x][y][z], in stored units. Between
  /// blocks.
  void aim(int id, int slot, Real* target);

  /// Whether any box holds a value of the row.
  bool touches(bool electric, int i, int j) const;
  /// Called by a row when its three components of E (or H) are complete at the block's step `slot`.
  void take(bool electric, int i, int j, int slot, const Fields<Real>& fields) const {
    const std::size_t row = static_cast<std::size_t>(i) * n_j_ + static_cast<std::size_t>(j);
    for (std::size_t set = 0; set < n_sets_; ++set) {
      if (!is_aimed_[static_cast<std::size_t>(slot) * n_sets_ + set]) continue;
      const Rows& rows = (electric ? e_rows_ : h_rows_)[set];
      for (std::uint32_t n = rows.start[row]; n < rows.start[row + 1]; ++n) {
        const Entry& entry = rows.entries[n];
        Real* target = targets_[static_cast<std::size_t>(slot) * boxes_.size() + entry.box];
        if (!target) continue;
        const SingleValue& single = singles_[entry.box];
        if (single.k >= 0)
          target[entry.row_in_box] = fields.row(single.component, i, j)[single.k];
        else
          copy(entry, i, j, fields, target);
      }
    }
  }
  std::size_t bytes() const;

 private:
  struct Entry {
    std::uint32_t box;
    std::uint32_t row_in_box;
  };
  /// Of boxes one value deep along z: planes across z have many rows and little of each. k < 0: not such a
  /// box.
  struct SingleValue {
    Component component;
    int k;
  };
  /// Entries of row n: [start[n], start[n + 1]).
  struct Rows {
    std::vector<std::uint32_t> start;
    std::vector<Entry> entries;
  };
  Rows rows_of(bool electric, std::size_t set) const;
  void copy(const Entry& entry, int i, int j, const Fields<Real>& fields, Real* target) const;

  Lattice lattice_;
  std::size_t n_j_ = 0, n_sets_ = 0;
  std::vector<CaptureBox> boxes_;
  std::vector<std::size_t> set_of_box_;
  std::vector<SingleValue> singles_;
  std::vector<Real*> targets_;  // [slot][box]
  std::vector<char> is_aimed_;  // [slot][set]
  std::vector<Rows> e_rows_, h_rows_;
};

}  // namespace wanewall
