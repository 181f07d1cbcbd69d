// In what functions of a face's cross-section the audit expands tangential E. The split (face_split.hpp)
// knows only this table of numbers, so that another set of functions can take the place of the plane waves.
//
// A basis is a product: one set of functions of each tangential axis for each of the two tangential
// components. The coefficients of a plane of one component, F [first][second], are  expand_first F
// expand_second^T.
#pragma once

#include <Eigen/Core>
#include <array>
#include <optional>
#include <string>

#include "geometry/lattice.hpp"
#include "postproc/lattice_wave.hpp"
#include "postproc/shell_modes.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// The functions of one tangential axis for one component.
struct AxisBasis {
  IndexRange indices;                 ///< stored indices that are expanded
  Eigen::MatrixXcd expand;            ///< [function][index - indices.begin]
  Eigen::ArrayXcd eigenvalue_per_m2;  ///< of the second difference along the axis; -K^2 for a plane wave
  /// [plane wave][function]: the functions' plane waves under the taper. Empty where each function is a plane
  /// wave.
  Eigen::MatrixXcd to_plane_waves;
  /// [index - indices.begin][function], the inverse of `expand`. Empty where the functions are not complete.
  Eigen::MatrixXcd modes;
};

/// Which two components are split. Tangential E, in the order first, second tangential axis; or, on the side
/// faces of media layered along z, H_z and E_z, which hold the whole field (shell_modes.hpp).
enum class SplitFields { tangential_e, hz_and_ez };

struct WaveBasis {
  SplitFields fields = SplitFields::tangential_e;
  bool eigenvalues_hold_w2 = false;  ///< K_n^2 is the sum of the two eigenvalues, without W^2
  /// [component][axis], both in the order first, second tangential axis.
  std::array<std::array<AxisBasis, 2>, 2> parts;
  /// K of the plane waves along each axis [rad/m], the same for both components.
  std::array<Eigen::ArrayXd, 2> plane_wave_per_m;
  /// A spectrum F [V s/m m^2] carries the sum of |F|^2 times flux times this: 1/(period_1 period_2).
  double per_area_per_m2 = 0.0;
  /// Clear width under the taper along each axis [m]; zero where the axis is periodic and plane waves are
  /// exact.
  std::array<double, 2> tapered_width_m{};
  /// The floor's divisor counts cos(theta) as at least this (face_split.hpp); zero for exact functions.
  double least_cosine = 0.0;

  /// Whether the functions are the whole set of the lattice's own modes, shells included.
  bool has_modes() const { return parts[0][0].modes.size() > 0; }
  bool is_exact() const { return has_modes() || (tapered_width_m[0] == 0.0 && tapered_width_m[1] == 0.0); }
};

/// Whether the lattice's own modes of a face's cross-section can be found, and why not.
std::string modes_unfit_because(const Lattice& lattice, const std::array<Face, 6>& shell,
                                const AuditFace& face);

/// The modes of all axes at one frequency; those that some face needs.
struct CrossSectionModes {
  std::array<std::optional<AxisModes>, 3> nodes, halves;  ///< by axis
  std::optional<AxisModes> layered_hz, layered_ez;        ///< along z
};

/// The lattice's own modes. Angles are read under one Hann taper over the clear width, along z over `window`
/// on faces of layered media. medium: that of the face, or of the window.
WaveBasis modal_basis(const Lattice& lattice, const AuditFace& face, const CrossSectionModes& modes,
                      const FaceMedium& medium, IndexRange window);

/// Cells along an axis under the taper of modal_basis(): the clear ones; along z on faces of layered media
/// the longest run of them in one medium.
IndexRange reading_cells(const Lattice& lattice, const AuditFace& face, Axis axis);

/// A tapered axis must have at least this many clear cells.
inline constexpr int fewest_tapered_cells = 8;

/// What kind of functions tapered_plane_waves() gives on a face.
struct BasisKind {
  std::string name;
  bool is_exact = false;  ///< the functions are the lattice's own modes
};
BasisKind tapered_plane_wave_kind(const Lattice& lattice, Side side);

/// Why plane waves cannot be used on this face; empty when they can.
std::string plane_waves_unfit_because(const Lattice& lattice, Side side);

/// Plane waves with |K| <= Re W along each axis.
///   Periodic axis: the lattice's own modes over one period, no taper; exact.
///   Other axes: two tapers over the clear part, at each component's own positions. The waves are split under
///   a flat one with sin^2 ramps over a tenth of the width at both ends, and then read under a Hann taper (F.
///   J. Harris, Proc. IEEE 66, 51 (1978)) over the flat part. The ramps' own error travels along the face and
///   is mostly at grazing; the second taper keeps it out of the bins at small angles, where it is 30 dB and
///   more below what a single taper leaves. The Hann taper has unit mean square over the clear width, so that
///   powers stand for the whole of it. The flat-tapered part is zero padded to 40 wavelengths, and by 16 at
///   least: the error must not come round.
/// Throws std::invalid_argument when plane_waves_unfit_because() has something to say.
WaveBasis tapered_plane_waves(const Lattice& lattice, Side side, const FaceMedium& medium);

}  // namespace wanewall
