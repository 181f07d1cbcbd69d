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
/// Kinds of the six faces, and that no face says what its kind does not take.
void read_kinds(Cursor& root, Scene& scene);
/// The lattice of the clear volume without its shell: mesh lines, periodic axes, time step. Returns the cell.
/// Needs the kinds.
Vec3 read_clear_lattice(Cursor& root, Scene& scene);
/// The tables of the absorbing faces, designed where the scene does not say them; needs everything that
/// stands in the clear volume, and the stop rule.
void read_layers(Cursor& root, Reading& reading, Scene& scene);
/// Grows the lattice, and what counts its nodes, by the cells of the layers.
void add_shell(Cursor& root, Scene& scene, const Vec3& cell_m);
/// The block of one face, with every_face under it.
Cursor face_block(Cursor& root, Side side);
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
