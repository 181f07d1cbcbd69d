// Which tile shape is fastest for a scene on this machine: found by using each for a while. The fields come
// out the same whatever the shape, so the steps of the search are steps of the run.
#pragma once

#include <cstddef>
#include <vector>

#include "solver/schedule.hpp"

namespace wanewall {

class TileChoice {
 public:
  /// The one shape given.
  explicit TileChoice(const TileShape& shape) : trials_{{shape}} {}
  /// Will try what may suit rows of so many bytes (all six fields) on caches of the sizes that processors of
  /// this decade have.
  TileChoice(const RowGroups& rows, std::size_t row_bytes, int threads);

  /// The shape for the next block of steps.
  const TileShape& next() const { return trials_[turns_.empty() ? best_ : turns_.back()].shape; }
  /// How long a block of `steps` steps of next() took.
  void took(int steps, double seconds);
  /// False while shapes are still being tried.
  bool is_settled() const { return turns_.empty(); }

 private:
  struct Trial {
    TileShape shape;
    double seconds_per_step = 0.0;  ///< the least so far; 0: not tried
  };
  std::vector<Trial> trials_;
  std::vector<std::size_t> turns_;  ///< trials still to be made, the next one last
  std::size_t best_ = 0;
  bool is_final_ = false;
  // Of the turn being made; short blocks are put together.
  int steps_ = 0;
  double seconds_ = 0.0;
};

}  // namespace wanewall
