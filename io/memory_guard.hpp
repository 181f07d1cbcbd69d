// Refusing what would not fit into memory.
#pragma once

#include <string>

#include "solver/results.hpp"

namespace wanewall {

/// What a run needs, with the queue in which its snapshots wait for the disk.
Footprint run_footprint(const Problem& problem);

/// Throws ProblemError when this machine has less memory than the footprint. An allocation on Linux succeeds
/// long before the memory is there, and the run would be killed in the night. `run` is what the text calls
/// it.
void require_memory(const Footprint& footprint, const std::string& run = "the run");

}  // namespace wanewall
