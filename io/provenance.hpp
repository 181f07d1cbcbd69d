// Where a result comes from: program, build, machine, time.
#pragma once

#include <string>

#include "io/record.hpp"

namespace wanewall {

/// Now, as "YYYY-MM-DD HH:mm:ss +0000".
std::string utc_now();

/// All that is known before a run: program version, build type with its options, compiler, processor, host
/// system. Times, threads, vector code and schedule are left to the run.
Provenance provenance_of_program();

/// Memory of this machine [bytes]; 0 when it does not say.
double machine_memory_bytes();

/// What `--version` prints: version, build and compiler on one line each.
std::string version_text();

}  // namespace wanewall
