// One-way walls against the reflection of their own formula on the lattice.
#include <catch2/catch.hpp>
#include <complex>

#include "solver/shell/column_run.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;
using Complex = std::complex<double>;

TEST_CASE("A one-way wall reflects what its formula says on the lattice", "[one_way][shell]") {
  ColumnRequest request;
  const auto axes =
      GENERATE(std::pair{Axis::z, Axis::x}, std::pair{Axis::x, Axis::z}, std::pair{Axis::y, Axis::z});
  request.along = axes.first;
  request.across = axes.second;
  request.high = GENERATE(true, false);
  request.polarisation = GENERATE(Polarisation::te, Polarisation::tm);
  request.angle_rad = degrees(request.high ? 35.0 : 50.0);
  request.medium.permittivity_rel = request.high ? 1.0 : 2.5;
  request.face.kind = FaceKind::one_way;
  request.face.one_way_order = GENERATE(1, 2);
  const ColumnReading reading = read_column(request);
  const Complex expected =
      face_reflection(request.face, request.medium, request.cell_m, reading.dt_s, reading.wave);
  CAPTURE(name_of(request.along), name_of(request.across), request.high, request.angle_rad,
          request.face.one_way_order, request.medium.permittivity_rel, db(std::abs(expected)),
          db(std::abs(reading.reflection)));
  CHECK(std::abs(reading.reflection - expected) < 1e-6);
  CHECK(db(std::abs(expected)) < -12.0);
}

TEST_CASE("One-way walls on six faces let a pulse out and stay quiet", "[one_way]") {
  const int order = GENERATE(1, 2);
  Problem p = vacuum_problem({24, 24, 24}, {1e-3, 1e-3, 1e-3}, 0.99);
  for (Side side : all_sides) {
    p.faces[static_cast<std::size_t>(index_of(side))].kind = FaceKind::one_way;
    p.faces[static_cast<std::size_t>(index_of(side))].one_way_order = order;
  }
  Dipole dipole;
  dipole.position_m = {12e-3, 12e-3, 12.5e-3};
  dipole.moment = {0.0, 0.0, 1.0};
  dipole.pulse.centre_hz = 12e9;
  dipole.pulse.width_s = 40e-12;
  dipole.pulse.delay_s = 240e-12;
  p.dipoles.push_back(dipole);
  Marcher<double> marcher(p, 2);
  double most = 0.0;
  for (int part = 0; part < 20; ++part) {
    marcher.advance(20, {});
    most = std::max(most, marcher.clear_energy_j());
  }
  marcher.advance(3000, {});
  const double left_db = 10.0 * std::log10(marcher.clear_energy_j() / most);
  WARN(left_db);
  CAPTURE(order, left_db);
  CHECK(left_db < -40.0);
}
