// How large the snapshots of a run are.
#pragma once

#include "solver/problem.hpp"

namespace wanewall::scene {

/// Values of one component of a snapshot at one step.
double snapshot_values(const Problem& problem, const SnapshotRequest& request, Component c);
/// Values that all snapshots of a run hold together, before compression.
double snapshot_values(const Problem& problem);

}  // namespace wanewall::scene
