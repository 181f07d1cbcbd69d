#include "solver/tile_choice.hpp"

#include <algorithm>
#include <cmath>

namespace wanewall {
namespace {

// A turn shorter than this says nothing.
constexpr double least_turn_s = 2e-3;
// Of the first round, how many come into the final, and how often.
constexpr std::size_t finalists = 3;
constexpr int final_turns = 2;

}  // namespace

TileChoice::TileChoice(const RowGroups& rows, std::size_t row_bytes, int threads) {
  const int n_x = rows.i_begin.back(), n_y = rows.j_begin.back();
  const auto add = [&](double x, double y, int steps) {
    const TileShape shape{std::clamp(static_cast<int>(std::lround(x)), 1, n_x),
                          std::clamp(static_cast<int>(std::lround(y)), 1, n_y), steps};
    const bool known =
        std::any_of(trials_.begin(), trials_.end(), [&](const Trial& trial) { return trial.shape == shape; });
    if (!known) trials_.push_back({shape, 0.0});
  };
  // Shapes that do well with rows of 400 cells in single precision; others have as many bytes.
  const double scale = std::sqrt(10240.0 / static_cast<double>(row_bytes));
  add(16 * scale, 16 * scale, 8);
  add(24 * scale, 16 * scale, 8);
  add(4 * scale, 16 * scale, 8);
  add(4 * scale, 24 * scale, 8);
  add(1, 16 * scale, 8);
  add(10 * scale, 10 * scale, 6);
  add(32 * scale, 32 * scale, 16);
  add(16 * scale, 16 * scale, 4);
  // A lattice that fits into the caches needs no tiles, only work for every thread.
  add(0.5 * n_x / threads, n_y, 8);
  add(n_x, n_y, 1);
  for (std::size_t n = trials_.size(); n-- > 0;) turns_.push_back(n);
  turns_.push_back(0);  // once more, to warm up
}

void TileChoice::took(int steps, double seconds) {
  if (is_settled()) return;
  steps_ += steps;
  seconds_ += seconds;
  if (seconds_ < least_turn_s) return;
  Trial& trial = trials_[turns_.back()];
  const double per_step = seconds_ / steps_;
  if (trial.seconds_per_step == 0.0 || per_step < trial.seconds_per_step) trial.seconds_per_step = per_step;
  turns_.pop_back();
  steps_ = 0;
  seconds_ = 0.0;
  if (!turns_.empty()) return;
  std::vector<std::size_t> order;
  for (std::size_t n = 0; n < trials_.size(); ++n) order.push_back(n);
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return trials_[a].seconds_per_step < trials_[b].seconds_per_step;
  });
  best_ = order[0];
  if (is_final_) return;
  is_final_ = true;
  for (int turn = 0; turn < final_turns; ++turn)
    for (std::size_t place = 0; place < std::min(order.size(), finalists); ++place)
      turns_.push_back(order[place]);
}

}  // namespace wanewall
