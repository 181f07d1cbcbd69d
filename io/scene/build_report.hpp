// What a scene will build, as aligned text for people: the answer of `wanewall check`.
#pragma once

#include <string>

#include "io/scene.hpp"
#include "solver/results.hpp"

namespace wanewall::scene {

struct ReportOptions {
  bool with_values = false;    ///< also list every value used
  double machine_bytes = 0.0;  ///< memory of this machine; 0: not known
  double cells_per_second = 0.0;  ///< measured for this kind of scene on this machine; 0: not known
  bool is_measured_now = false;
  double start_seconds = 0.0;  ///< what comes before the march: reading, designing the shell, painting
};

std::string build_report(const Scene& scene, const Footprint& footprint, const ReportOptions& options);

/// Reflection of a face's layer at normal incidence in the continuum, for waves in the background [dB]:
/// 20 log10 exp(-2 n eta0 * integral of sigma), n: refractive index. The lattice does worse for strong
/// layers.
double continuum_reflection_db(const Problem& problem, Side side);

}  // namespace wanewall::scene
