#include "io/scene/snapshot_size.hpp"

#include <cmath>

#include "solver/interpolation.hpp"

namespace wanewall::scene {

double snapshot_values(const Problem& problem, const SnapshotRequest& request, Component c) {
  const Lattice& lattice = problem.lattice;
  double values = 1.0;
  for (Axis a : all_axes) {
    if (request.normal == a) continue;
    const auto i = static_cast<std::size_t>(index_of(a));
    // As the recorder does: out to the next index beyond each end.
    const LinearPair lo = linear_pair(lattice, c, a, request.lo_m[i]);
    const LinearPair hi = linear_pair(lattice, c, a, request.hi_m[i]);
    const int first = lo.upper_weight == 1.0 ? lo.upper : lo.lower;
    const int last = hi.upper_weight == 0.0 ? hi.lower : hi.upper;
    values *= std::ceil(static_cast<double>(last - first + 1) / request.stride);
  }
  return values;
}

double snapshot_values(const Problem& problem) {
  double total = 0.0;
  for (const SnapshotRequest& request : problem.recording.snapshots) {
    const double times =
        std::floor(static_cast<double>(problem.last_step()) / static_cast<double>(request.every)) + 1.0;
    for (Component c : request.components) total += times * snapshot_values(problem, request, c);
  }
  return total;
}

}  // namespace wanewall::scene
