#include "solver/recorders/snapshots.hpp"

#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {

template <class Real>
CaptureBox SnapshotRecorder<Real>::box_of(const Lattice& lattice, const SnapshotRequest& request,
                                          Component c) {
  CaptureBox box;
  box.component = c;
  box.stride = 1;
  for (Axis axis : all_axes) {
    const auto a = static_cast<std::size_t>(index_of(axis));
    // One index beyond each end, so that every point of the request lies between recorded ones.
    const LinearPair lo = linear_pair(lattice, c, axis, request.lo_m[a]);
    const LinearPair hi = linear_pair(lattice, c, axis, request.hi_m[a]);
    const int first = lo.upper_weight == 1.0 ? lo.upper : lo.lower;
    const int last = hi.upper_weight == 0.0 ? hi.lower : hi.upper;
    box.first[a] = first;
    box.count[a] = last - first + 1;
  }
  return box;
}

template <class Real>
SnapshotRecorder<Real>::SnapshotRecorder(const Lattice& lattice, const std::vector<SnapshotRequest>& requests,
                                         Captures<Real>& captures, Sink& sink)
    : lattice_(lattice), requests_(requests), captures_(captures), sink_(sink) {
  for (std::size_t r = 0; r < requests.size(); ++r) {
    const int set = captures.new_set();
    for (Component c : requests[r].components) {
      Part part;
      part.request = r;
      part.component = c;
      part.box = box_of(lattice, requests[r], c);
      for (Axis axis : all_axes) {
        const auto a = static_cast<std::size_t>(index_of(axis));
        if (requests[r].normal == axis) {
          part.across = linear_pair(lattice, c, axis, requests[r].lo_m[a]);
          part.positions_m[a] = {requests[r].lo_m[a]};
        } else {
          for (int n = 0; n < part.box.count[a]; n += requests[r].stride)
            part.positions_m[a].push_back(lattice.position_m(c, axis, part.box.first[a] + n));
        }
      }
      part.capture = captures.add(set, part.box);
      parts_.push_back(std::move(part));
    }
  }
}

template <class Real>
void SnapshotRecorder<Real>::before_block(const StepBlock& block) {
  block_ = block;
  for (Part& part : parts_) {
    std::size_t used = 0;
    for (long step = block.first; step < block.end(); ++step) {
      if (step % requests_[part.request].every != 0) continue;
      if (used == part.values.size()) part.values.emplace_back(part.box.size());
      captures_.aim(part.capture, static_cast<int>(step - block.first), part.values[used++].data());
    }
  }
}

template <class Real>
void SnapshotRecorder<Real>::after_block() {
  std::vector<std::size_t> used(parts_.size(), 0);
  for (long step = block_.first; step < block_.end(); ++step)
    for (std::size_t p = 0; p < parts_.size(); ++p)
      if (step % requests_[parts_[p].request].every == 0)
        hand_over(parts_[p], parts_[p].values[used[p]++], step);
}

template <class Real>
void SnapshotRecorder<Real>::hand_over(const Part& part, const std::vector<Real>& recorded, long step) {
  const SnapshotRequest& request = requests_[part.request];
  Snapshot snapshot;
  snapshot.name = request.name;
  snapshot.step = step;
  snapshot.component = part.component;
  snapshot.time_s =
      is_electric(part.component) ? time_of_e_s(step, lattice_.dt_s) : time_of_h_s(step, lattice_.dt_s);
  snapshot.positions_m = part.positions_m;
  const auto& count = part.box.count;
  const double unit = is_electric(part.component) ? 1.0 : 1.0 / eta0_ohm;
  const auto value_at = [&](const Index3& at) {
    const std::size_t row = static_cast<std::size_t>(at[0]) * static_cast<std::size_t>(count[1]) +
                            static_cast<std::size_t>(at[1]);
    return static_cast<double>(
        recorded[row * static_cast<std::size_t>(count[2]) + static_cast<std::size_t>(at[2])]);
  };
  // A plane holds one or two layers along its normal; everything else is taken as it is, every stride-th
  // position.
  const bool two_layers = request.normal && count[static_cast<std::size_t>(index_of(*request.normal))] == 2;
  std::vector<Real> values;
  Index3 at{};
  const auto n_kept = [&](std::size_t a) { return static_cast<int>(part.positions_m[a].size()); };
  values.reserve(part.positions_m[0].size() * part.positions_m[1].size() * part.positions_m[2].size());
  for (int x = 0; x < n_kept(0); ++x) {
    for (int y = 0; y < n_kept(1); ++y) {
      for (int z = 0; z < n_kept(2); ++z) {
        at = {x * request.stride, y * request.stride, z * request.stride};
        double field = value_at(at);
        if (two_layers) {
          at[static_cast<std::size_t>(index_of(*request.normal))] = 1;
          field = (1.0 - part.across.upper_weight) * field + part.across.upper_weight * value_at(at);
        }
        values.push_back(static_cast<Real>(unit * field));
      }
    }
  }
  snapshot.values = std::move(values);
  sink_.take(std::move(snapshot));
}

template <class Real>
double SnapshotRecorder<Real>::bytes(const Lattice& lattice, const std::vector<SnapshotRequest>& requests,
                                     int block_steps) {
  double sum = 0.0;
  for (const SnapshotRequest& request : requests) {
    const double at_once = std::ceil(static_cast<double>(block_steps) / static_cast<double>(request.every));
    for (Component c : request.components)
      sum += at_once * static_cast<double>(box_of(lattice, request, c).size() * sizeof(Real));
  }
  return sum;
}

template class SnapshotRecorder<float>;
template class SnapshotRecorder<double>;

}  // namespace wanewall
