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
  void before_step(long step) override;
  void after_step(long step) override;
  /// Bytes of the buffers for a request list.
  static double bytes(const Lattice& lattice, const std::vector<SnapshotRequest>& requests);

 private:
  struct Part {
    std::size_t request;
    Component component;
    int capture;
    CaptureBox box;
    LinearPair across;  // along the normal of a plane
    std::array<std::vector<double>, 3> positions_m;
    std::vector<Real> values;
  };
  static CaptureBox box_of(const Lattice& lattice, const SnapshotRequest& request, Component c);

  Lattice lattice_;
  std::vector<SnapshotRequest> requests_;
  Captures<Real>& captures_;
  Sink& sink_;
  std::vector<Part> parts_;
};

}  // namespace wanewall
