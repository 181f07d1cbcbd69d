// What a face will reflect, before the run: exact on the lattice, and the continuum's value beside it.
#pragma once

#include <vector>

#include "solver/shell/lattice_reflection.hpp"

namespace wanewall {

/// Which waves to ask about.
struct PredictionGrid {
  std::vector<double> frequencies_hz;
  std::vector<double> angles_rad;  ///< K_n = K cos(angle); below pi/2
  std::vector<double>
      decays_per_cell;  ///< evanescent waves, falling as exp(-decay) per cell towards the face
};

struct PredictedReflection {
  double frequency_hz = 0.0;
  Polarisation polarisation = Polarisation::te;
  bool is_evanescent = false;
  double angle_rad_or_decay_per_cell = 0.0;
  double lattice_db = 0.0;
  double continuum_db = 0.0;
};

/// All waves of the grid in one medium; te and tm, or te alone where both are the same (every kind but
/// matched_slab).
std::vector<PredictedReflection> predict(const Face& face, const Medium& medium, double spacing_m,
                                         double dt_s, const PredictionGrid& grid);

}  // namespace wanewall
