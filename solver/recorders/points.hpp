// Fields at points, every step.
#pragma once

#include "solver/interpolation.hpp"
#include "solver/recorders/captures.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/results.hpp"

namespace wanewall {

template <class Real>
class PointRecorder : public Recorder {
 public:
  PointRecorder(const Lattice& lattice, const std::vector<PointRequest>& requests, Captures<Real>& captures);
  void before_block(const StepBlock& block) override;
  void after_block() override;
  std::vector<PointSeries> finish() { return std::move(series_); }

 private:
  struct Corner {
    int capture = 0;
    std::array<LinearPair, 3> pair;
    Index3 count{};
    std::size_t size = 0;
    std::vector<Real> values;  // [slot][x][y][z]
  };
  static double value(const Corner& corner, int slot);

  Captures<Real>& captures_;
  std::vector<PointSeries> series_;
  std::vector<std::array<Corner, 6>> corners_;
  int n_slots_ = 0;
};

}  // namespace wanewall
