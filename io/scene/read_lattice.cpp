// Faces of the shell and the lattice inside them.
#include <fmt/format.h>

#include <cmath>

#include "geometry/constants.hpp"
#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

/// Lengths that are a whole number of cells to this part of a cell pass.
constexpr double whole_cell_tolerance = 1e-6;
constexpr double most_cells_along = 1e6;
constexpr double most_cells = 4e9;

/// The alpha at the layer's inner face that lets slow tails decay: a fifth of what matches the lowest
/// frequency.
constexpr double alpha_part_of_band = 0.2;

FaceKind kind_of(const std::string& word) {
  if (word == "cfs_pml") return FaceKind::cfs_pml;
  if (word == "matched_slab") return FaceKind::matched_slab;
  if (word == "electric_wall") return FaceKind::electric_wall;
  if (word == "magnetic_wall") return FaceKind::magnetic_wall;
  return FaceKind::periodic;
}

/// The block of one face, with every_face under it.
Cursor face_block(Cursor& shell, Side side) {
  Cursor every = shell.block("every_face");
  Cursor faces = shell.block("faces");
  return faces.block_under(std::string(name_of(side)), every);
}

void refuse_layer_keys(const Cursor& face, FaceKind kind) {
  for (const char* key : {"order", "reflection", "sigma_max", "kappa_max", "alpha_max", "alpha_order"}) {
    const std::string_view k = key;
    const bool slab_takes_it = k == "order" || k == "reflection" || k == "sigma_max";
    if (!face.has_itself(key) || (kind == FaceKind::matched_slab && slab_takes_it)) continue;
    face.reject_text(key, fmt::format("{} is given for a face of kind {}", face.path(key), name_of(kind)),
                     kind == FaceKind::matched_slab ? "kind, cells, order, reflection or sigma_max"
                                                    : "no layer keys, since this face has no layer",
                     "remove it or choose kind: cfs_pml");
  }
}

/// Cells that a length of the clear volume holds; rejects lengths that are no whole number of cells.
int cells_of(const Cursor& clear, Axis axis, double lo_m, double hi_m, double cell_m) {
  const std::string key(name_of(axis));
  const double exact = (hi_m - lo_m) / cell_m;
  const double whole = std::round(exact);
  if (whole > most_cells_along)
    clear.reject_text(key, fmt::format("{} has {} cells", clear.path(key), format_number(exact)),
                      fmt::format("at most {} cells along an axis", format_number(most_cells_along)),
                      "choose a larger mesh.cell or a smaller clear volume");
  if (whole >= 1.0 && std::abs(exact - whole) <= whole_cell_tolerance) return static_cast<int>(whole);
  const double fewer = std::max(1.0, std::floor(exact)), more = std::max(fewer + 1.0, std::ceil(exact));
  const auto choice = [&](double n) {
    return fmt::format("{} ({} {})", format_quantity(n * cell_m, Family::length, 9), format_number(n),
                       n == 1.0 ? "cell" : "cells");
  };
  clear.reject_text(key,
                    fmt::format("{} is {} long, which is {} cells of {}", clear.path(key),
                                format_quantity(hi_m - lo_m, Family::length, 9), format_number(exact, 9),
                                format_quantity(cell_m, Family::length)),
                    fmt::format("a whole number of cells; nearest: {} or {}", choice(fewer), choice(more)),
                    "move one end, or change mesh.cell");
}

}  // namespace

void read_lattice(Cursor& root, Scene& scene) {
  Lattice& lattice = scene.problem.lattice;
  Cursor shell = root.block("shell");
  for (Side side : all_sides) {
    const auto s = static_cast<std::size_t>(index_of(side));
    Cursor face = face_block(shell, side);
    const FaceKind kind = kind_of(face.word("kind"));
    scene.problem.faces[s].kind = kind;
    if (!absorbs(kind)) {
      refuse_layer_keys(face, kind);
      if (face.has_itself("cells") && face.whole("cells") != 0)
        face.reject("cells", fmt::format("0 for a face of kind {}", name_of(kind)), "remove it");
      continue;
    }
    if (kind == FaceKind::matched_slab) refuse_layer_keys(face, kind);
    lattice.shell_cells[s] = static_cast<int>(face.whole("cells"));
    if (lattice.shell_cells[s] == 0)
      face.reject("cells", "a whole number from 1 to 64 for an absorbing face",
                  "8 to 16 cells are usual; for no layer at all choose kind: electric_wall");
  }
  for (Axis a : all_axes) {
    const auto kind_at = [&](bool high) { return scene.problem.face(side_of(a, high)).kind; };
    const bool lo = kind_at(false) == FaceKind::periodic, hi = kind_at(true) == FaceKind::periodic;
    if (lo != hi) {
      const Side given = side_of(a, hi);
      Cursor face = face_block(shell, given);
      face.reject_text("kind",
                       fmt::format("{} is periodic and {} is not", name_of(given), name_of(opposite(given))),
                       "periodic faces in pairs",
                       fmt::format("make {} periodic too, or neither", name_of(opposite(given))));
    }
    lattice.periodic[static_cast<std::size_t>(index_of(a))] = lo;
  }

  Cursor mesh = root.block("mesh");
  Vec3 cell_m{};
  if (mesh.kind("cell") == Node::Kind::list)
    cell_m = mesh.vec3("cell");
  else
    cell_m.fill(mesh.quantity("cell"));
  Cursor clear = root.block("clear_volume");
  double total = 1.0;
  std::array<int, 3> cells{};
  std::array<double, 3> first_m{};
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    const std::string key(name_of(a));
    const auto [lo_m, hi_m] = clear.pair(key);
    if (!(lo_m < hi_m)) clear.reject(key, "two positions, the lower one first", "swap or move the two");
    const int lo_shell = lattice.shell(side_of(a, false)), hi_shell = lattice.shell(side_of(a, true));
    cells[i] = cells_of(clear, a, lo_m, hi_m, cell_m[i]) + lo_shell + hi_shell;
    first_m[i] = lo_m - lo_shell * cell_m[i];
    total *= cells[i];
    const double reach_m = std::max(std::abs(lo_m), std::abs(hi_m)) + cells[i] * cell_m[i];
    if (reach_m > 1e9 * cell_m[i])
      clear.reject(key, "positions within 1e9 cells of the origin, so that neighbouring nodes differ",
                   "move the scene nearer to the origin");
  }
  if (total > most_cells)
    mesh.reject_text("cell", fmt::format("the lattice has {} cells, shell included", format_number(total)),
                     fmt::format("at most {} cells", format_number(most_cells)),
                     "choose a larger mesh.cell or a smaller clear volume");
  for (std::size_t i = 0; i < 3; ++i) lattice.lines[i] = MeshLines::uniform(first_m[i], cell_m[i], cells[i]);
  lattice.dt_s = mesh.number("courant") * lattice.courant_limit_s();
}

void read_layers(Cursor& root, Scene& scene) {
  Problem& problem = scene.problem;
  Cursor shell = root.block("shell");
  const bool has_goal = shell.has("goal");
  const double goal_db = has_goal ? shell.quantity("goal") : 0.0;
  const double background_rel = problem.media[static_cast<std::size_t>(problem.background)].permittivity_rel;
  for (Side side : all_sides) {
    Face& face = problem.faces[static_cast<std::size_t>(index_of(side))];
    if (!absorbs(face.kind)) continue;
    Cursor block = face_block(shell, side);
    const double cell_m = problem.lattice.along(axis_of(side)).smallest_cell_m();
    const int cells = problem.lattice.shell(side);
    PolynomialGrading grading;
    grading.order = block.number("order");
    // What the face says itself goes before what every face says.
    const bool by_sigma = block.has("sigma_max") && !block.has_itself("reflection");
    if (by_sigma) {
      grading.sigma_max_s_per_m = block.quantity("sigma_max");
    } else if (block.has("reflection") || has_goal) {
      const double r0_db = block.has("reflection") ? block.quantity("reflection") : goal_db;
      if (!block.has("reflection")) block.use("reflection", format_quantity(goal_db, Family::level));
      grading.sigma_max_s_per_m =
          sigma_max_for_reflection(std::pow(10.0, r0_db / 20.0), grading.order, cells * cell_m);
      block.use("sigma_max", format_quantity(grading.sigma_max_s_per_m, Family::conductivity));
    } else {
      grading.sigma_max_s_per_m = sigma_max_rule(grading.order, cell_m, background_rel);
      block.use("sigma_max", format_quantity(grading.sigma_max_s_per_m, Family::conductivity));
    }
    if (face.kind == FaceKind::cfs_pml) {
      grading.kappa_max = block.number("kappa_max");
      if (block.has("alpha_max")) {
        grading.alpha_max_s_per_m = block.quantity("alpha_max");
      } else {
        grading.alpha_max_s_per_m = alpha_part_of_band * 2.0 * pi * eps0_f_per_m * scene.band_lo_hz;
        block.use("alpha_max", format_quantity(grading.alpha_max_s_per_m, Family::conductivity));
      }
      grading.alpha_order = block.number("alpha_order");
    }
    face.layer = polynomial_layer(grading, cells);
  }
}

}  // namespace wanewall::scene
