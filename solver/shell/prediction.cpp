#include "solver/shell/prediction.hpp"

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"
#include "solver/shell/continuum_reflection.hpp"

namespace wanewall {
namespace {

double to_db(std::complex<double> amplitude) {
  return 20.0 * std::log10(std::max(std::abs(amplitude), 1e-300));
}

}  // namespace

std::vector<PredictedReflection> predict(const Face& face, const Medium& medium, double spacing_m,
                                         double dt_s, const PredictionGrid& grid) {
  std::vector<PredictedReflection> all;
  for (const Polarisation polarisation : both_polarisations) {
    if (polarisation == Polarisation::tm && face.kind != FaceKind::matched_slab) break;
    for (const double hz : grid.frequencies_hz) {
      const double omega = 2.0 * pi * hz;
      const auto add = [&](bool is_evanescent, double number, const FaceWave& wave,
                           std::complex<double> kn2) {
        all.push_back({hz, polarisation, is_evanescent, number,
                       to_db(face_reflection(face, medium, spacing_m, dt_s, wave)),
                       to_db(continuum_reflection(face, medium, spacing_m, omega, kn2))});
      };
      const std::complex<double> k2 = continuum_k_squared(medium, omega);
      for (const double angle : grid.angles_rad) {
        const double c = std::cos(angle);
        add(false, angle, wave_at_angle(medium, omega, dt_s, angle, polarisation), k2 * c * c);
      }
      for (const double decay : grid.decays_per_cell) {
        const double per_m = decay / spacing_m;
        add(true, decay, wave_that_decays(medium, omega, dt_s, per_m, spacing_m, polarisation),
            -per_m * per_m);
      }
    }
  }
  return all;
}

}  // namespace wanewall
