// What the design of a shell takes from the scene: how large it is, what stands near each face, which media
// run into it, which frequencies the pulse holds.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "solver/problem.hpp"
#include "solver/shell/design_points.hpp"

namespace wanewall {

/// Of one face.
struct FaceSurroundings {
  /// Cells from the face to the nearest object or dipole, and which one that is. Objects that run on through
  /// the face do not count, nor does a plane wave's surface, which sends nothing outwards. Without any:
  /// `clearance_alone` cells and an empty name.
  double clearance_cells = 0.0;
  std::string nearest;
  std::vector<int> media;  ///< that touch the face, perfect conductors left out; indices into Problem::media
};

/// Clearance where nothing stands in the clear volume.
inline constexpr double clearance_alone = 3.0;

struct ShellSurroundings {
  double diagonal_m = 0.0;        ///< of the clear volume
  double top_frequency_hz = 0.0;  ///< above it the pulse's spectrum is 80 dB below its peak
  bool has_statics = false;       ///< the pulse has a mean that may leave charge or slow fields behind
  bool is_long = false;           ///< the run outlasts the longest wave that is designed for otherwise
  std::array<FaceSurroundings, 6> faces;
};

/// Needs lattice, media, objects, sources and the stop rule of the problem, but no shell. `band_hi_hz` stands
/// in for the pulse where there is none.
ShellSurroundings surroundings_of(const Problem& problem, double band_hi_hz);

/// Values that a user puts in place of those found.
struct DesignOverrides {
  std::optional<double> clearance_cells, index, top_frequency_hz, diagonal_m;
  std::optional<bool> statics;
};

/// Wavelengths, in cells along the normal, go from the pulse's top (at least 5 cells) to max(300, 8
/// diagonals), and to 20000 when statics remain or the run is long; the index at each is the largest sqrt|eps
/// mu| of the media at the face, losses included; alpha_min is 0.12 over the diagonal.
/// All to six digits.
DesignInputs design_inputs(const Problem& problem, const ShellSurroundings& surroundings, Side side,
                           const DesignOverrides& overrides);

/// sqrt|eps mu| relative to vacuum at a frequency, losses included.
double index_magnitude(const Medium& medium, double frequency_hz);

}  // namespace wanewall
