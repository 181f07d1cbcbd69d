// The same bits whatever the threads and the schedule, with every kind of face, source and recorder in play.
#include <catch2/catch.hpp>
#include <cstring>

#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

LayerTable layer(int cells) {
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, 1e-3, 1.0);
  grading.kappa_max = 2.0;
  grading.alpha_max_s_per_m = 0.02;
  return polynomial_layer(grading, cells);
}

MoebiusTable moebius_layer(int cells) {
  MoebiusTable table;
  for (int j = 0; j < cells; ++j) {
    table.kappa.push_back(0.3 + 0.4 * j);
    table.sigma_s_per_m.push_back(j == 2 ? 0.0 : 5.0 + 4.0 * j);
    table.alpha_s_per_m.push_back(0.02 + 0.1 * j);
  }
  return table;
}

void set_moebius(Problem& p, Side side, int cells) {
  set_face(p, side, FaceKind::moebius);
  p.faces[static_cast<std::size_t>(index_of(side))].moebius = moebius_layer(cells);
  p.lattice.shell_cells[static_cast<std::size_t>(index_of(side))] = cells;
}

/// Which faces a scene has; plane waves need sides that let them.
enum class Kind {
  all_absorbing,
  mixed_walls,
  moebius,
  moebius_mixed,
  one_way,
  periodic_x,
  periodic_y,
  periodic_z
};

Problem busy_problem(Kind kind, Precision precision) {
  Problem p = vacuum_problem({37, 29, 45}, {1e-3, 1e-3, 1.2e-3});
  p.precision = precision;
  for (Side s : all_sides) set_face(p, s, FaceKind::cfs_pml, layer(6));
  if (kind == Kind::mixed_walls) {
    set_face(p, Side::x_lo, FaceKind::magnetic_wall);
    set_face(p, Side::x_hi, FaceKind::electric_wall);
    set_face(p, Side::y_hi, FaceKind::magnetic_wall);
    set_face(p, Side::z_lo, FaceKind::magnetic_wall);
    set_face(p, Side::y_lo, FaceKind::matched_slab, layer(5));
    set_face(p, Side::z_hi, FaceKind::matched_slab, layer(7));
  }
  if (kind == Kind::moebius)
    for (Side s : all_sides) set_moebius(p, s, 4 + index_of(s));
  if (kind == Kind::moebius_mixed) {
    // Beside ordinary layers, on one side only, one cell thin, and beside walls.
    set_moebius(p, Side::x_hi, 5);
    set_moebius(p, Side::y_lo, 1);
    set_face(p, Side::y_hi, FaceKind::magnetic_wall);
    set_moebius(p, Side::z_lo, 7);
    set_face(p, Side::z_hi, FaceKind::electric_wall);
  }
  if (kind == Kind::one_way) {
    for (Side s : all_sides) set_face(p, s, FaceKind::one_way);
    for (Side s : {Side::x_lo, Side::y_hi, Side::z_lo})
      p.faces[static_cast<std::size_t>(index_of(s))].one_way_order = 2;
    set_moebius(p, Side::y_lo, 4);
    set_face(p, Side::z_hi, FaceKind::cfs_pml, layer(5));
  }
  if (kind == Kind::periodic_x) set_moebius(p, Side::z_hi, 6);
  if (kind == Kind::periodic_z) set_moebius(p, Side::x_lo, 3);
  if (kind == Kind::periodic_x) set_periodic(p, Axis::x);
  if (kind == Kind::periodic_y) set_periodic(p, Axis::y);
  if (kind == Kind::periodic_z) set_periodic(p, Axis::z);
  set_courant(p, 0.99);
  p.media.push_back({"wet", 6.0, 1.5, 0.05, 10.0, false, false});
  p.media.push_back({"metal", 1.0, 1.0, 0.0, 0.0, true, false});
  p.media.push_back({"magnetic", 1.0, 1.0, 0.0, 0.0, false, true});
  p.objects.push_back({Sphere{{18e-3, 14e-3, 27e-3}, 5e-3}, 1, "sphere"});
  p.objects.push_back({Box{{14e-3, 11e-3, 20e-3}, {17e-3, 15e-3, 22e-3}, {0, 0.6, 0.8}, 0.4}, 2, "box"});
  p.objects.push_back({Cylinder{{20e-3, 15e-3, 30e-3}, {24e-3, 17e-3, 33e-3}, 1.6e-3}, 3, "cylinder"});
  Pulse pulse;
  pulse.centre_hz = 12e9;
  pulse.width_s = 25e-12;
  pulse.delay_s = 70e-12;
  p.dipoles.push_back({false, {12.3e-3, 12.1e-3, 26e-3}, {1e-3, 2e-3, -1e-3}, pulse});
  p.dipoles.push_back({true, {24.3e-3, 18.1e-3, 22e-3}, {0.2, -0.1, 0.3}, pulse});
  if (kind == Kind::all_absorbing || kind == Kind::moebius) {
    PlaneWave wave;
    wave.theta_rad = degrees(40.0);
    wave.phi_rad = degrees(25.0);
    wave.e_angle_rad = degrees(30.0);
    wave.pulse = pulse;
    wave.box_lo = {10, 10, 10};
    wave.box_hi = {27, 19, 35};
    p.plane_wave = wave;
    p.objects.resize(1);
    p.objects[0].shape = Sphere{{18e-3, 14.5e-3, 27e-3}, 3e-3};
  }
  p.recording.points.push_back({"near", {15.2e-3, 13.7e-3, 30.9e-3}});
  p.recording.audit.frequencies_hz = {8e9, 14e9};
  for (Side s : all_sides)
    p.recording.audit.faces[static_cast<std::size_t>(index_of(s))] = absorbs(p.face(s).kind);
  p.recording.energy_every = 20;
  p.stop.at_s = 150 * p.lattice.dt_s;
  return p;
}

struct KeepSnapshots : Sink {
  void take(Snapshot s) override { all.push_back(std::move(s)); }
  std::vector<Snapshot> all;
};

struct Everything {
  RunResult result;
  std::vector<Snapshot> snapshots;
};

Everything run_all(Problem p, int threads, Schedule schedule, std::optional<TileShape> tiles = {}) {
  p.threads = threads;
  p.schedule = schedule;
  p.tiles = tiles;
  // The whole lattice at the end, every component.
  Vec3 lo{}, hi{};
  for (Axis a : all_axes) {
    lo[static_cast<std::size_t>(index_of(a))] = p.lattice.along(a).node_m(0);
    hi[static_cast<std::size_t>(index_of(a))] = p.lattice.along(a).node_m(p.lattice.cells(a));
  }
  p.recording.snapshots.push_back(
      {"all", {}, lo, hi, {all_components.begin(), all_components.end()}, 150, 1});
  KeepSnapshots sink;
  NoMonitor monitor;
  Everything out;
  out.result = run(p, sink, monitor);
  out.snapshots = std::move(sink.all);
  return out;
}

template <class T>
bool same_bits(const std::vector<T>& a, const std::vector<T>& b) {
  return a.size() == b.size() && std::memcmp(a.data(), b.data(), a.size() * sizeof(T)) == 0;
}

void check_same(const Everything& a, const Everything& b) {
  REQUIRE(a.snapshots.size() == 6);
  REQUIRE(b.snapshots.size() == 6);
  for (std::size_t n = 0; n < 6; ++n) {
    CAPTURE(name_of(a.snapshots[n].component));
    std::visit(
        [&](const auto& values) {
          using Values = std::decay_t<decltype(values)>;
          CHECK(same_bits(values, std::get<Values>(b.snapshots[n].values)));
          double largest = 0.0;
          for (auto v : values) largest = std::max(largest, std::abs(static_cast<double>(v)));
          CHECK(largest > 1e-9);
          CHECK(largest < 1e6);
        },
        a.snapshots[n].values);
  }
  for (std::size_t c = 0; c < 6; ++c)
    CHECK(same_bits(a.result.points[0].values[c], b.result.points[0].values[c]));
  CHECK(same_bits(a.result.energy.joule, b.result.energy.joule));
  REQUIRE(a.result.audit.faces.size() == b.result.audit.faces.size());
  for (std::size_t f = 0; f < a.result.audit.faces.size(); ++f)
    for (std::size_t p = 0; p < a.result.audit.faces[f].planes.size(); ++p)
      CHECK(same_bits(a.result.audit.faces[f].planes[p].sums, b.result.audit.faces[f].planes[p].sums));
}

}  // namespace

TEST_CASE("Fields and recordings do not depend on threads or schedule", "[schedule][exact]") {
  const auto kind = GENERATE(Kind::all_absorbing, Kind::mixed_walls, Kind::moebius, Kind::moebius_mixed,
                             Kind::one_way, Kind::periodic_x, Kind::periodic_y, Kind::periodic_z);
  const auto precision = GENERATE(Precision::single_precision, Precision::double_precision);
  const Problem p = busy_problem(kind, precision);
  const Everything reference = run_all(p, 1, Schedule::plain);
  for (const int threads : {1, 2, 3, 5}) {
    for (const Schedule schedule : {Schedule::plain, Schedule::fused}) {
      CAPTURE(static_cast<int>(kind), threads, name_of(schedule));
      check_same(reference, run_all(p, threads, schedule));
    }
  }
  // Tiles that cut near walls and layers, thinner than a layer, of one step, and larger than the lattice.
  for (const TileShape tiles : {TileShape{5, 3, 4}, TileShape{1, 1, 7}, TileShape{16, 9, 1},
                                TileShape{4, 100, 13}, TileShape{100, 100, 32}}) {
    for (const int threads : {1, 3}) {
      CAPTURE(static_cast<int>(kind), threads, tiles.x_rows, tiles.y_rows, tiles.steps);
      check_same(reference, run_all(p, threads, Schedule::tiles, tiles));
    }
  }
}

TEST_CASE("All vector codes of this processor give the same bits", "[schedule][exact]") {
  const Problem p = busy_problem(GENERATE(Kind::all_absorbing, Kind::moebius), Precision::single_precision);
  std::vector<std::vector<float>> fields;
  for (int code = 0; code <= static_cast<int>(best_vector_code()); ++code) {
    Marcher<float> marcher(p, 2, static_cast<VectorCode>(code));
    marcher.advance(120, {});
    std::vector<float> all;
    for (Component c : all_components)
      for (int i = 0; i < 37; ++i)
        for (int j = 0; j < 29; ++j) {
          const float* row = marcher.fields().row(c, i, j);
          all.insert(all.end(), row, row + 46);
        }
    fields.push_back(std::move(all));
  }
  for (std::size_t n = 1; n < fields.size(); ++n) CHECK(same_bits(fields[0], fields[n]));
  CHECK(*std::max_element(fields[0].begin(), fields[0].end()) > 1e-3f);
}
