// How finely the lattice resolves waves in the media of a scene.
#pragma once

#include <string>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall::scene {

/// One medium at one frequency.
struct WaveIn {
  double wavelength_m = 0.0;  ///< 2 pi / Re k
  double depth_m = 0.0;       ///< 1 / |Im k|; infinite without loss
  double loss_tangent = 0.0;  ///< electric and magnetic together: |Im| / Re of k^2
};
WaveIn wave_in(const Medium& medium, double frequency_hz);

/// Indices of the media that the background or an object is made of, in the order of the list.
std::vector<int> media_in_use(const Problem& problem);

/// The largest cell along the axes along which fields can vary [m].
double coarsest_cell_m(const Lattice& lattice);

/// Above this loss tangent a medium counts as a conductor: its depth, not its wavelength, must be resolved.
inline constexpr double conductor_loss_tangent = 1.0;

}  // namespace wanewall::scene
