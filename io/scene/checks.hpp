// Checks on a scene that has been read: what cannot work is an error, what is doubtful a warning.
#pragma once

#include "io/scene.hpp"
#include "io/scene/cursor.hpp"

namespace wanewall::scene {

/// All of the checks below.
void check_scene(Cursor& root, Reading& reading, const Scene& scene);

/// Objects outside the lattice (error) or thinner than its meshes (warning); media that nothing is made of.
void check_objects(Cursor& root, Reading& reading, const Scene& scene);
/// The plane wave's surface against the media it lies in. Returns the index of the medium through which the
/// wave enters (the background without a plane wave).
int check_surface(Cursor& root, Reading& reading, const Scene& scene);
/// Cells per wavelength or depth in every medium in use: an error below `fewest_cells_per_wavelength`.
void check_resolution(Cursor& root, Reading& reading, const Scene& scene);
/// The pulse against band, mesh and time of the run; `entry_medium` carries the wave.
void check_pulse(Cursor& root, Reading& reading, const Scene& scene, int entry_medium);
/// Sizes that no machine holds.
void check_size(Cursor& root, const Scene& scene);

/// Along an axis the lattice's phase velocity is 10 to 15 % low at 4 cells per wavelength and about 1 % at 10
/// (from its dispersion relation, A. Taflove and S. C. Hagness, Computational Electrodynamics, 3rd ed.).
inline constexpr double fewest_cells_per_wavelength = 4.0;
inline constexpr double good_cells_per_wavelength = 10.0;

/// The spectrum of the pulse, relative to its peak, below which the band counts as not covered [dB].
inline constexpr double weakest_in_band_db = -40.0;

}  // namespace wanewall::scene
