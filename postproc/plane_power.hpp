// Power through an audit plane, and what a plane wave would carry through the same cross-section.
// Powers are 1/2 Re(E x H*).n of the audit's Fourier sums, counted outwards, in W s^2 (see face_split.hpp).
#pragma once

#include <optional>

#include "geometry/lattice.hpp"
#include "solver/results.hpp"

namespace wanewall {

/// Net power outwards between node plane 0 (E) and half plane 0 (H), by the direct sum over the lattice:
/// every E_t times the H half a cell outside it times the primal length along E_t times the dual length
/// across. Holds for any media, with or without layers.
struct NetPower {
  double clear_w_s2 = 0.0;  ///< over the clear cross-section
  double whole_w_s2 = 0.0;  ///< over the whole cross-section, side shells included
};

/// Empty when the planes it needs were not recorded. Throws std::invalid_argument when they do not fit the
/// lattice.
std::optional<NetPower> net_power(const Lattice& lattice, const AuditFace& face, std::size_t frequency_index);

/// Area of the clear cross-section [m^2].
double clear_area_m2(const Lattice& lattice, Side side);

/// Power of the scene's incident plane wave through the clear cross-section of a face, sign dropped [W s^2].
/// It is |E|^2 |cos| area / (2 eta) with the lattice's own wavenumbers, sin(kz d)/(W d) in place of |cos|, so
/// that a ratio to the powers of this file is free of the mesh's second-order error. Empty without a plane
/// wave, or when it travels along the face. The incident medium is lossless; it is taken from the audited
/// face with its impedance, else non-magnetic.
std::optional<double> incident_power_w_s2(const Lattice& lattice, const AuditRecord& audit,
                                          const AuditFace& face, std::size_t frequency_index);

}  // namespace wanewall
