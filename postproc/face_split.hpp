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
// With the lattice's own modes (shell_modes.hpp) no taper comes before the split, and totals are taken over
// the whole plane. Their floor's divisor is W d, which is that of a residue constant along the normal at
// normal incidence: near cut-off the bare rule is 15 to 30 dB too large.
//
// On side faces of media layered along z, H_z (on half planes -1, 0, 1) and E_z (on planes 0, 1, 2) are
// split; R of H_z is minus that of tangential E. Under the taper, which lies in one medium, a plane wave's K
// x E = Omega mu H and K.E = 0 give the other tangential component,
//   E_1 = (h K_n Omega mu H_z - K_1 K_z E_z)/(K_n^2 + K_1^2),   h = +1 on x faces, -1 on y faces.
//
// The expected reading is R(K_n) exp(-2 j k_n g d) a of every wave, g cells before the shell, with the
// layer's own R at complex K_n, read the same way.
//
// Units: the sums of the audit are V s/m, so a power here is 1/2 Re(E x H*) in W s^2 = J/Hz; four times it is
// the energy per hertz of a real signal's one-sided spectrum.
#pragma once

#include <Eigen/Core>
#include <array>
#include <complex>
#include <functional>
#include <optional>
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
  double expected = 0.0;  ///< what `returned` should be by the layer's theory; 0 without one
  double floor = 0.0;     ///< what `returned` could be by error alone, from the third plane, with its margin
  long waves = 0;

  SplitPower& operator+=(const SplitPower& other);
};

/// Field norms over the whole plane, side shells included, relative to the outgoing wave's.
struct WholePlane {
  double returned = 0.0;
  double floor = 0.0;              ///< from the third plane, with its margin
  std::optional<double> expected;  ///< by the layer's theory
  std::optional<double> closure;   ///< of returned minus expected
};

/// Angles of incidence theta = asin(K_t / Re W) from the face's normal, in equal bins from 0 to 90 degrees.
/// TE has E along the face; TM has H along it. At exactly normal incidence, where there is no plane of
/// incidence, TE holds E along the second tangential axis and TM along the first (order x, y, z).
struct FaceSplit {
  std::array<std::vector<SplitPower>, 2> bins;  ///< [polarisation][bin]
  std::array<SplitPower, 2> totals;             ///< sums over the bins
  std::optional<WholePlane> whole;              ///< where the basis is the lattice's own modes
};

/// The reflection that a face should have: R of tangential E at its layer's first node from K_n^2 [1/m^2],
/// complex. Without a function nothing is expected.
struct FaceTheory {
  std::function<std::complex<double>(std::complex<double>)> reflection;
  int cells_to_shell = 2;  ///< from plane 0
};

inline constexpr int default_angle_bins = 9;

/// Why this face cannot be split; empty when it can.
std::string no_split_because(const Lattice& lattice, const AuditRecord& audit, const AuditFace& face);

/// Three adjacent planes of the two components that are split, at one frequency, all stored samples:
/// [component: see SplitFields][plane](first, second). V s/m, A s/m.
using FacePlanes = std::array<std::array<Eigen::MatrixXcd, 3>, 2>;
/// Throws std::invalid_argument when planes are missing or do not fit the lattice.
FacePlanes face_planes(const Lattice& lattice, const AuditFace& face, std::size_t frequency_index);

/// The split itself. Plane waves travelling closer to the face than sin(theta) = 0.9998 and evanescent ones
/// are left out of the bins. spacing_m is that of the planes.
FaceSplit split_planes(const FacePlanes& planes, Side side, double spacing_m, const FaceMedium& medium,
                       const WaveBasis& basis, int angle_bins = default_angle_bins,
                       const FaceTheory& theory = {});

}  // namespace wanewall
