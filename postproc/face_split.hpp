// Outgoing and returned power of one shell face at one frequency, from tangential E on three adjacent node
// planes.
//
// Each plane m = 0, 1, 2 (outwards) is expanded in the basis: coefficients e_m, each with its own kz. With d
// the spacing along the normal and t = exp(-j kz d),
//   incoming at plane 0   b = (e_0 t - e_1)/(t - 1/t),     outgoing   a = e_0 - b.
// The third plane gives the floor without any theory:  delta = t (e_0 - 2 cos(kz d) e_1 + e_2)/(t - 1/t)  is
// the difference of b read from planes 0, 1 and from planes 1, 2. What is not a wave of this kz falls off
// along the normal by some t' in place of t, and does delta/(1 - t t') to b. The floor takes the worst of it,
// t' = 1: |1 - t| = |2 sin(kz d/2)|, where a tapered basis counts cos(theta) as 0.2 or so at least, and 6 dB
// on top.
//
// Units: the sums of the audit are V s/m, so a power here is 1/2 Re(E x H*) in W s^2 = J/Hz; four times it is
// the energy per hertz of a real signal's one-sided spectrum.
#pragma once

#include <Eigen/Core>
#include <array>
#include <string>
#include <vector>

#include "geometry/lattice.hpp"
#include "postproc/lattice_wave.hpp"
#include "postproc/wave_basis.hpp"
#include "solver/results.hpp"
#include "solver/shell/polarisation.hpp"

namespace wanewall {

/// Powers of the plane waves in one bin [W s^2].
struct SplitPower {
  double outgoing = 0.0;
  double returned = 0.0;
  double floor = 0.0;  ///< what `returned` could be by error alone, from the third plane, with its margin
  long waves = 0;

  SplitPower& operator+=(const SplitPower& other);
};

/// Angles of incidence theta = asin(K_t / Re W) from the face's normal, in equal bins from 0 to 90 degrees.
/// TE has E along the face; TM has H along it. At exactly normal incidence, where there is no plane of
/// incidence, TE holds E along the second tangential axis and TM along the first (order x, y, z).
struct FaceSplit {
  std::array<std::vector<SplitPower>, 2> bins;  ///< [polarisation][bin]
  std::array<SplitPower, 2> totals;             ///< sums over the bins
};

inline constexpr int default_angle_bins = 9;

/// Why tangential E of this face cannot be split; empty when it can.
std::string no_split_because(const Lattice& lattice, const AuditFace& face);

/// Tangential E on node planes 0, 1, 2 at one frequency, all stored samples [V s/m]:
/// [component: first, second tangential axis][plane](first, second).
using TangentialPlanes = std::array<std::array<Eigen::MatrixXcd, 3>, 2>;
/// Throws std::invalid_argument when planes are missing or do not fit the lattice.
TangentialPlanes tangential_planes(const Lattice& lattice, const AuditFace& face,
                                   std::size_t frequency_index);

/// The split itself. Plane waves travelling closer to the face than sin(theta) = 0.9998 and evanescent ones
/// are left out. spacing_m is that of the planes.
FaceSplit split_planes(const TangentialPlanes& planes, double spacing_m, const LatticeMedium& medium,
                       const WaveBasis& basis, int angle_bins = default_angle_bins);

}  // namespace wanewall
