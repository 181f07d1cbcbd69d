// Plane waves that are exact solutions of the lattice's own equations, sampled where the total-field surface
// needs them.
#pragma once

#include <memory>

#include "solver/media_rows.hpp"
#include "solver/problem.hpp"

namespace wanewall {

/// Fields of a plane wave at two moments of each step: H at (step - 1/2) dt and E at step dt, both in V/m (H
/// as eta0 H). Tables of several steps are held at once, each in a slot.
class IncidentWave {
 public:
  virtual ~IncidentWave() = default;
  /// True while the wave may be non-zero anywhere on the surface.
  virtual bool is_active(long step) const = 0;
  /// Makes room for the tables of so many steps. Between blocks of steps.
  virtual void hold(int n_slots) = 0;
  /// Prepares the tables of one step. The work is cut into n_parts() pieces that may run side by side, also
  /// for different slots.
  virtual int n_parts() const = 0;
  virtual void prepare(long step, int slot, int part) = 0;
  /// `count` values of a component from (i, j, k) on along z. The wave must be active and prepared. Returns
  /// the range of them that is not quiet; all others are zero.
  virtual IndexRange row(int slot, Component c, int i, int j, int k, int count, double* out) const = 0;
  /// `count` values of a component from (i, j, k) on along y, likewise.
  virtual IndexRange line_y(int slot, Component c, int i, int j, int k, int count, double* out) const = 0;
};

/// Medium that carries the wave: lossless.
struct WaveMedium {
  double permittivity_rel = 1.0;
  double permeability_rel = 1.0;
};

/// Any direction in a homogeneous medium: spectral synthesis on a uniform grid of wavenumbers. Each term has
/// the lattice's own frequency and polarisation, so it satisfies the update equations exactly; what is left
/// is the interpolation along the direction of travel (8-point Lagrange on a quarter of the smallest cell),
/// below -185 dB for pulses centred at 10 cells per wavelength. Throws ProblemError when the pulse needs
/// waves the lattice cannot carry.
///   Sources of the idea: J. B. Schneider, IEEE Trans. Antennas Propag. 52, 3280 (2004); T. Tan and M.
///   Potter, IEEE Trans. Antennas Propag. 58, 2641 (2010).
std::unique_ptr<IncidentWave> make_homogeneous_wave(const Lattice& lattice, const PlaneWave& wave,
                                                    const WaveMedium& medium);

/// Update coefficients of tangential E (at nodes) and tangential H (at half nodes) along z.
struct LayeredColumn {
  std::vector<UpdateCoefficients> e, h;
};

/// Normal incidence on layers along z: per frequency an exact ladder through the solver's own coefficients,
/// on a contour of complex wavenumbers so that late tails of lossy ground do not wrap round. `end_s` is the
/// time up to which the wave must be right.
///   Source of the contour shift: E. Kausel and J. M. Roesset, J. Eng. Mech. 118, 721 (1992).
std::unique_ptr<IncidentWave> make_layered_wave(const Lattice& lattice, const PlaneWave& wave,
                                                const WaveMedium& entry_medium, const LayeredColumn& column,
                                                double end_s);

}  // namespace wanewall
