#include "io/memory_guard.hpp"

#include <fmt/format.h>

#include "io/provenance.hpp"
#include "io/snapshot_queue.hpp"
#include "io/terminal.hpp"

namespace wanewall {

Footprint run_footprint(const Problem& problem) {
  Footprint footprint = footprint_of(problem);
  footprint.snapshots += snapshot_queue_bytes(problem);
  return footprint;
}

void require_memory(const Footprint& footprint, const std::string& run) {
  const double needed = footprint.total();
  const double present = machine_memory_bytes();
  if (present > 0.0 && needed > present) {
    throw ProblemError(fmt::format(
        "{} needs {} of memory, this machine has {}\n"
        "  next: see what needs it with 'wanewall check', then make cells larger, the volume smaller, or "
        "record less",
        run, bytes_text(needed), bytes_text(present)));
  }
}

}  // namespace wanewall
