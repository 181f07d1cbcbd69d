// The lattice: first that of the clear volume, then with its shell.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

/// Lengths that are a whole number of cells to this part of a cell pass.
constexpr double whole_cell_tolerance = 1e-6;
constexpr double most_cells_along = 1e6;
constexpr double most_cells = 4e9;

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

void check_cells(Cursor& root, const Lattice& lattice) {
  if (lattice.n_cells() > most_cells)
    root.block("mesh").reject_text(
        "cell", fmt::format("the lattice has {} cells, shell included", format_number(lattice.n_cells())),
        fmt::format("at most {} cells", format_number(most_cells)),
        "choose a larger mesh.cell or a smaller clear volume");
}

}  // namespace

Vec3 read_clear_lattice(Cursor& root, Scene& scene) {
  Lattice& lattice = scene.problem.lattice;
  for (Axis a : all_axes) {
    const auto kind_at = [&](bool high) { return scene.problem.face(side_of(a, high)).kind; };
    const bool lo = kind_at(false) == FaceKind::periodic, hi = kind_at(true) == FaceKind::periodic;
    if (lo != hi) {
      const Side given = side_of(a, hi);
      Cursor face = face_block(root, given);
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
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    const std::string key(name_of(a));
    const auto [lo_m, hi_m] = clear.pair(key);
    if (!(lo_m < hi_m)) clear.reject(key, "two positions, the lower one first", "swap or move the two");
    const int cells = cells_of(clear, a, lo_m, hi_m, cell_m[i]);
    const double reach_m = std::max(std::abs(lo_m), std::abs(hi_m)) + cells * cell_m[i];
    if (reach_m > 1e9 * cell_m[i])
      clear.reject(key, "positions within 1e9 cells of the origin, so that neighbouring nodes differ",
                   "move the scene nearer to the origin");
    lattice.lines[i] = MeshLines::uniform(lo_m, cell_m[i], cells);
  }
  lattice.dt_s = mesh.number("courant") * lattice.courant_limit_s();
  check_cells(root, lattice);
  return cell_m;
}

void add_shell(Cursor& root, Scene& scene, const Vec3& cell_m) {
  Problem& problem = scene.problem;
  Lattice& lattice = problem.lattice;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    const int lo = problem.face(side_of(a, false)).cells(), hi = problem.face(side_of(a, true)).cells();
    lattice.shell_cells[2 * i] = lo;
    lattice.shell_cells[2 * i + 1] = hi;
    lattice.lines[i] = MeshLines::uniform(lattice.lines[i].node_m(0) - lo * cell_m[i], cell_m[i],
                                          lattice.cells(a) + lo + hi);
    if (!problem.plane_wave) continue;
    problem.plane_wave->box_lo[i] += lo;
    problem.plane_wave->box_hi[i] += lo;
  }
  check_cells(root, lattice);
}

}  // namespace wanewall::scene
