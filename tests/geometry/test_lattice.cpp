// Positions, index ranges and time levels: the one place that owns every "+1".
#include <catch2/catch.hpp>
#include <cmath>

#include "geometry/constants.hpp"
#include "geometry/lattice.hpp"

using namespace wanewall;

namespace {

Lattice small_lattice() {
  Lattice lattice;
  lattice.lines[0] = MeshLines::uniform(-1.0, 0.5, 4);
  lattice.lines[1] = MeshLines({0.0, 1.0, 3.0, 6.0});
  lattice.lines[2] = MeshLines::uniform(10.0, 0.25, 8);
  lattice.shell_cells = {1, 1, 0, 0, 2, 3};
  return lattice;
}

}  // namespace

TEST_CASE("Components sit where Yee put them", "[lattice]") {
  // Rows: Ex Ey Ez Hx Hy Hz; columns: half along x, y, z.  Source: K. S. Yee, IEEE TAP 14, 302 (1966), from
  // memory.
  const bool half[6][3]{{true, false, false}, {false, true, false}, {false, false, true},
                        {false, true, true},  {true, false, true},  {true, true, false}};
  for (Component c : all_components)
    for (Axis a : all_axes) CHECK(is_half(c, a) == half[index_of(c)][index_of(a)]);
}

TEST_CASE("Positions on a graded axis", "[lattice]") {
  const Lattice lattice = small_lattice();
  CHECK(lattice.position_m(Component::ex, {0, 1, 2}) == Vec3{-0.75, 1.0, 10.5});
  CHECK(lattice.position_m(Component::ey, {0, 1, 2}) == Vec3{-1.0, 2.0, 10.5});
  CHECK(lattice.position_m(Component::hx, {3, 2, 0}) == Vec3{0.5, 4.5, 10.125});
  CHECK(lattice.along(Axis::y).dual_m(1) == 1.5);
  CHECK(lattice.along(Axis::y).dual_m(0) == 1.0);
  CHECK(lattice.along(Axis::y).dual_m(3) == 3.0);
  CHECK_FALSE(lattice.along(Axis::y).is_uniform());
  CHECK(lattice.along(Axis::x).is_uniform());
}

TEST_CASE("Index ranges: stored and clear", "[lattice]") {
  const Lattice lattice = small_lattice();
  struct Row {
    Component c;
    Axis a;
    IndexRange stored, clear;
  };
  const Row rows[]{
      {Component::ex, Axis::x, {0, 4}, {1, 3}}, {Component::ex, Axis::y, {0, 4}, {0, 4}},
      {Component::ex, Axis::z, {0, 9}, {2, 6}}, {Component::hz, Axis::x, {0, 4}, {1, 3}},
      {Component::hz, Axis::y, {0, 3}, {0, 3}}, {Component::hz, Axis::z, {0, 9}, {2, 6}},
      {Component::ez, Axis::z, {0, 8}, {2, 5}}, {Component::hx, Axis::x, {0, 5}, {1, 4}},
  };
  for (const Row& row : rows) {
    CAPTURE(name_of(row.c), name_of(row.a));
    CHECK(lattice.stored(row.c, row.a) == row.stored);
    CHECK(lattice.clear(row.c, row.a) == row.clear);
  }
  CHECK(lattice.clear_node(Side::x_lo) == 1);
  CHECK(lattice.clear_node(Side::x_hi) == 3);
  CHECK(lattice.clear_cells(Axis::z) == IndexRange{2, 5});
}

TEST_CASE("Mesh lines refuse what is no mesh", "[lattice]") {
  CHECK_THROWS_AS(MeshLines({1.0}), std::invalid_argument);
  CHECK_THROWS_AS(MeshLines({0.0, 1.0, 1.0}), std::invalid_argument);
  CHECK_THROWS_AS(MeshLines({0.0, std::nan("")}), std::invalid_argument);
}

TEST_CASE("Nearest node", "[lattice]") {
  const MeshLines lines({0.0, 1.0, 3.0, 6.0});
  CHECK(lines.nearest_node(-5.0) == 0);
  CHECK(lines.nearest_node(0.4) == 0);
  CHECK(lines.nearest_node(1.9) == 1);
  CHECK(lines.nearest_node(2.1) == 2);
  CHECK(lines.nearest_node(60.0) == 3);
}

TEST_CASE("The stable time step", "[lattice]") {
  Lattice lattice;
  for (auto& lines : lattice.lines) lines = MeshLines::uniform(0.0, 1e-3, 10);
  // 1.9258 ps for 1 mm cubes: 0.99 of it is the 1.9066 ps of the published plate test (from memory).
  CHECK(0.99 * lattice.courant_limit_s() == Approx(1.9066e-12).epsilon(1e-4));
  lattice.lines[0] = lattice.lines[1] = MeshLines::uniform(0.0, 1e-3, 1);
  lattice.periodic = {true, true, false};
  CHECK(lattice.courant_limit_s() == Approx(1e-3 / c0_m_per_s));
}

TEST_CASE("Sides and axes", "[lattice]") {
  for (Side s : all_sides) {
    CHECK(side_of(axis_of(s), is_high(s)) == s);
    CHECK(opposite(opposite(s)) == s);
    CHECK(axis_of(opposite(s)) == axis_of(s));
  }
  CHECK(next(Axis::z) == Axis::x);
  CHECK(previous(Axis::x) == Axis::z);
  CHECK(name_of(Side::z_lo) == "z-");
}
