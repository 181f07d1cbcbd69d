// Planes and sub-volumes, handed to the sink every so many steps.
#pragma once

#include "solver/interpolation.hpp"
#include "solver/recorders/captures.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/results.hpp"

namespace wanewall {

template <class Real>
class SnapshotRecorder : public Recorder {
 public:
  SnapshotRecorder(const Lattice& lattice, const std::vector<SnapshotRequest>& requests,
                   Captures<Real>& captures, Sink& sink);
  void before_block(const StepBlock& block) override;
  void after_block() override;
  /// Bytes of the buffers for a request list when blocks have so many steps.
  static double bytes(const Lattice& lattice, const std::vector<SnapshotRequest>& requests, int block_steps);

 private:
  struct Part {
    std::size_t request;
    Component component;
    int capture;
    CaptureBox box;
    LinearPair across;  // along the normal of a plane
    std::array<std::vector<double>, 3> positions_m;
    std::vector<std::vector<Real>> values;  // one for each recorded step of a block
  };
  void hand_over(const Part& part, const std::vector<Real>& values, long step);
  static CaptureBox box_of(const Lattice& lattice, const SnapshotRequest& request, Component c);

  Lattice lattice_;
  std::vector<SnapshotRequest> requests_;
  Captures<Real>& captures_;
  Sink& sink_;
  std::vector<Part> parts_;
  StepBlock block_;
};

}  // namespace wanewall
