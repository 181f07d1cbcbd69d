// The parts of a scene, read from checked blocks into the problem. Each throws SceneError for what cannot be.
#pragma once

#include <string>

#include "io/scene.hpp"
#include "io/scene/cursor.hpp"

namespace wanewall::scene {

/// Title, band, precision and how the run is carried out.
void read_head(Cursor& root, Scene& scene);
/// Media and the background. Media keep their order in the file; vacuum comes first.
void read_media(Cursor& root, Scene& scene);
/// Kinds of the six faces and the lattice: mesh lines, shell cells, periodic axes, time step.
void read_lattice(Cursor& root, Scene& scene);
/// The tables of the absorbing faces; needs the lattice and the background.
void read_layers(Cursor& root, Scene& scene);
void read_objects(Cursor& root, Scene& scene);
/// Needs the lattice and the objects.
void read_illumination(Cursor& root, Reading& reading, Scene& scene);
void read_stop(Cursor& root, Scene& scene);
void read_record(Cursor& root, Scene& scene);

/// Index of a medium by name; rejects an unknown name at the key.
int medium_index(const Scene& scene, const Cursor& at, std::string_view key, const std::string& name);

/// Ends of the clear volume, widened by `slack_cells` cells.
Bounds clear_bounds(const Lattice& lattice, double slack_cells);
bool lies_in(const Bounds& bounds, const Vec3& point_m);
/// "x from -0.8 m to 0.8 m, y from ..."
std::string bounds_text(const Bounds& bounds);

}  // namespace wanewall::scene
