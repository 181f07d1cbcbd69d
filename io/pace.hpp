// What this machine is known to do with a kind of scene: the tiles that were fastest and the rate. Kept from
// run to run in a file of the user's cache folder; nothing depends on it but time.
#pragma once

#include <optional>
#include <string>

#include "solver/results.hpp"

namespace wanewall {

struct Pace {
  TileShape tiles;
  double cells_per_second = 0.0;
};

/// What the pace depends on: processor, threads, precision, cells along each axis, kinds of faces, sources
/// and audit.
std::string pace_key(const Problem& problem);

/// $XDG_CACHE_HOME/wanewall/pace.yaml, or ~/.cache in place of the variable; empty when neither is set.
std::string pace_file();

/// Nothing when there is no note, or the file cannot be read.
std::optional<Pace> known_pace(const Problem& problem);

/// Never throws: a note that cannot be kept is only a search more.
void remember_pace(const Problem& problem, const Pace& pace);

/// Marches the problem for about `seconds`, recording for nobody, and gives what the second half of that came
/// to. Throws ProblemError as run() does.
Pace measure_pace(Problem problem, double seconds);

}  // namespace wanewall
