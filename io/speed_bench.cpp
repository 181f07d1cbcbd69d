#include "io/speed_bench.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstring>
#include <stdexcept>

#include <fmt/format.h>

#include "geometry/constants.hpp"
#include "solver/bandwidth.hpp"
#include "solver/marcher.hpp"
#include "solver/recorders/audit.hpp"
#include "solver/textbook_loop.hpp"

namespace wanewall {
namespace {

constexpr double cell_m = 1e-3;
constexpr double courant = 0.99;
constexpr int shell_cells = 10;

Problem bare_cube(int nx, int ny, int nz, int threads) {
  Problem problem;
  problem.media.push_back({"vacuum", 1.0, 1.0, 0.0, 0.0, false, false});
  const int cells[3]{nx, ny, nz};
  for (std::size_t a = 0; a < 3; ++a) problem.lattice.lines[a] = MeshLines::uniform(0.0, cell_m, cells[a]);
  problem.lattice.dt_s = courant * problem.lattice.courant_limit_s();
  problem.threads = threads;
  return problem;
}

/// A shell on six faces. What the layers' numbers are makes no difference to the time.
Problem cube_in_shell(int cells, FaceKind kind, int threads) {
  Problem problem = bare_cube(cells, cells, cells, threads);
  Face face;
  face.kind = kind;
  if (kind == FaceKind::moebius) {
    for (int j = 0; j < shell_cells; ++j) {
      face.moebius.kappa.push_back(0.25);
      face.moebius.sigma_s_per_m.push_back(2.0 * (j + 1) / (eta0_ohm * cell_m));
      face.moebius.alpha_s_per_m.push_back(0.01 / (eta0_ohm * cell_m));
    }
  } else {
    PolynomialGrading grading;
    grading.sigma_max_s_per_m = sigma_max_rule(grading.order, cell_m, 1.0);
    grading.alpha_max_s_per_m = 0.01;
    face.layer = polynomial_layer(grading, shell_cells);
  }
  problem.faces.fill(face);
  problem.lattice.shell_cells.fill(shell_cells);
  return problem;
}

/// A marcher with what records its audit.
template <class Real>
struct Recorded {
  Marcher<Real> marcher;
  Captures<Real> captures;
  AuditRecorder<Real> audit;
  std::vector<Recorder*> recorders;

  Recorded(const Problem& problem, int threads)
      : marcher(problem, threads), captures(problem.lattice), audit(problem, captures), recorders{&audit} {
    captures.freeze();
    marcher.attach(&captures);
  }
  void advance(long steps) { marcher.advance(steps, recorders); }
  /// Lets the tiles be found, at moments at which the wave crosses the lattice.
  void settle(const Problem& problem, std::optional<TileShape> tiles) {
    const PlaneWave& wave = *problem.plane_wave;
    const double path_m = std::sqrt(3.0) * 0.5 * problem.lattice.cells(Axis::x) * cell_m;
    marcher.set_step(std::lround((wave.pulse.delay_s + 0.8 * path_m / c0_m_per_s) / problem.lattice.dt_s));
    marcher.use(Schedule::tiles, tiles);
    do advance(marcher.block_steps());
    while (!marcher.tile_choice().is_settled());
  }
};

/// Both must compute the same thing before either is timed.
double textbook_difference(int threads) {
  constexpr int n = 32, steps = 40;
  TextbookLoop loop(n, static_cast<float>(courant / std::sqrt(3.0)), threads);
  Marcher<float> marcher(bare_cube(n, n, n, threads), threads);
  for (int i = 8; i < 24; ++i)
    for (int k = 1; k < n; ++k) {
      const auto value = static_cast<float>(std::sin(0.37 * i) * std::cos(0.21 * k));
      loop.at(1, i, 11, k) = value;
      marcher.fields().row(Component::ey, i, 11)[k] = value;
    }
  loop.advance(steps);
  marcher.advance(steps, {});
  double worst = 0.0;
  for (Component c : all_components)
    for (int i = 0; i < n; ++i)
      for (int j = 0; j < n; ++j)
        for (int k = 0; k < n; ++k)
          worst = std::max(worst, std::abs(static_cast<double>(loop.at(index_of(c), i, j, k)) -
                                           static_cast<double>(marcher.fields().row(c, i, j)[k])));
  return worst;
}

/// The full scene, small: plain sweeps and tiles must give the same bits.
void require_same_bits(int threads, const TileShape& tiles) {
  constexpr int n = 64, steps = 160;
  const Problem scene = full_speed_scene(n, threads, Precision::single_precision);
  Recorded<float> plain(scene, threads), tiled(scene, threads);
  plain.marcher.use(Schedule::plain, {});
  tiled.marcher.use(Schedule::tiles, tiles);
  plain.advance(steps);
  tiled.advance(steps);
  const auto a = plain.marcher.state(), b = tiled.marcher.state();
  double largest = 0.0;
  for (std::size_t part = 0; part < a.size(); ++part) {
    if (std::memcmp(a[part].data(), b[part].data(), a[part].size_bytes()) != 0)
      throw std::logic_error("tiles and plain sweeps do not give the same bits");
    if (part < 6)
      for (float value : a[part]) largest = std::max(largest, std::abs(static_cast<double>(value)));
  }
  if (!(largest > 1e-3)) throw std::logic_error("the full scene's fields are too small to compare");
}

/// What crosses the memory when the rows around a tile are read once more by its neighbours.
double tiled_bytes(const TileShape& shape) {
  const double steps = shape.steps;
  return 48.0 / steps * (1.0 + steps / shape.x_rows) * (1.0 + steps / shape.y_rows);
}

struct Contender {
  SpeedRow row;
  double cells;
  std::function<void(long)> advance;
};

double seconds_of(const std::function<void()>& work) {
  const auto start = std::chrono::steady_clock::now();
  work();
  return std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
}

}  // namespace

double SpeedRow::median() const {
  std::vector<double> sorted = rates;
  std::sort(sorted.begin(), sorted.end());
  return sorted.empty() ? 0.0 : sorted[sorted.size() / 2];
}
double SpeedRow::least() const {
  return rates.empty() ? 0.0 : *std::min_element(rates.begin(), rates.end());
}
double SpeedRow::most() const {
  return rates.empty() ? 0.0 : *std::max_element(rates.begin(), rates.end());
}

const SpeedRow& SpeedResult::loop(const std::string& id) const {
  for (const SpeedRow& row : loops)
    if (row.id == id) return row;
  throw std::logic_error("no loop is called " + id);
}

double SpeedResult::one_sweep_limit() const {
  double best = 0.0;
  for (const SpeedRow& row : memory) best = std::max(best, row.median());
  return best / 48.0;
}

Problem full_speed_scene(int cells, int threads, Precision precision) {
  Problem problem = cube_in_shell(cells, FaceKind::moebius, threads);
  problem.precision = precision;
  constexpr int inset = 6;
  PlaneWave wave;
  wave.theta_rad = 37.3 * pi / 180.0;
  wave.phi_rad = 71.9 * pi / 180.0;
  wave.e_angle_rad = 0.25 * pi;
  wave.pulse = modulated_gaussian_for_band(c0_m_per_s / (40.0 * cell_m), c0_m_per_s / (12.0 * cell_m));
  for (std::size_t a = 0; a < 3; ++a) {
    wave.box_lo[a] = shell_cells + inset;
    wave.box_hi[a] = cells - shell_cells - inset;
  }
  problem.plane_wave = wave;
  problem.media.push_back({"metal", 1.0, 1.0, 0.0, 0.0, true, false});
  problem.media.push_back({"dielectric", 4.0, 1.0, 0.0, 0.0, false, false});
  problem.media.push_back({"lossy", 9.0, 1.0, 0.05, 0.0, false, false});
  // Where objects lie in the total-field box, as parts of its edge: they keep off its surface.
  const double lo = wave.box_lo[0] * cell_m, edge = (wave.box_hi[0] - wave.box_lo[0]) * cell_m;
  const auto in_box = [&](double x, double y, double z) {
    return Vec3{lo + x * edge, lo + y * edge, lo + z * edge};
  };
  problem.objects.push_back({Sphere{in_box(0.42, 0.45, 0.5), 0.11 * edge}, 1, "ball"});
  problem.objects.push_back(
      {Box{in_box(0.55, 0.4, 0.3), in_box(0.7, 0.65, 0.55), {0.0, 0.0, 1.0}, 0.3}, 2, "block"});
  problem.objects.push_back(
      {Cylinder{in_box(0.4, 0.6, 0.35), in_box(0.6, 0.62, 0.7), 0.05 * edge}, 3, "rod"});
  for (int f = 0; f < 9; ++f)
    problem.recording.audit.frequencies_hz.push_back(c0_m_per_s / (cell_m * (40.0 - 3.5 * f)));
  problem.recording.audit.faces.fill(true);
  problem.stop.at_s = 1e5 * problem.lattice.dt_s;
  return problem;
}

SpeedResult measure_speed(const SpeedSetting& setting) {
  SpeedResult result;
  result.setting = setting;
  const int n = setting.cells, threads = setting.threads;
  const double all = std::pow(static_cast<double>(n), 3.0);
  result.largest_difference = textbook_difference(threads);
  if (!(result.largest_difference < 1e-5))
    throw std::logic_error(
        fmt::format("the textbook loop and the solver differ by {:.2e}", result.largest_difference));

  BandwidthLoops memory(std::size_t{1} << 26, threads);
  result.memory = {{"copy", "copy"}, {"triad", "triad"}};
  TextbookLoop textbook(n, static_cast<float>(courant / std::sqrt(3.0)), threads);
  Marcher<float> bare(bare_cube(n, n, n, threads), threads);
  result.vector_code = bare.vector_code();
  bare.use(Schedule::tiles, setting.tiles);
  do bare.advance(bare.block_steps(), {});
  while (!bare.tile_choice().is_settled());
  result.bare_tiles = bare.tile_choice().next();

  const Problem scene = full_speed_scene(n, threads, Precision::single_precision);
  auto full = std::make_unique<Recorded<float>>(scene, threads);
  full->settle(scene, setting.tiles);
  result.scene_tiles = full->marcher.tile_choice().next();
  require_same_bits(threads, result.scene_tiles);
  result.bytes_per_cell = static_cast<double>(full->marcher.field_bytes() + full->marcher.layer_bytes() +
                                              full->marcher.media_bytes()) /
                          scene.lattice.n_cells();

  const auto bare_with = [&](Schedule schedule, const TileShape& tiles) {
    return [&bare, schedule, tiles](long steps) {
      bare.use(schedule, tiles);
      bare.advance(steps, {});
    };
  };
  // One thread on rows as long as the cube's, so few that they stay in the cache of its core.
  const std::size_t row_bytes = 6 * sizeof(float) * static_cast<std::size_t>(n + 16);
  const int side = std::clamp(static_cast<int>(std::sqrt(0.5e6 / static_cast<double>(row_bytes))), 3, 24);
  Marcher<float> cached(bare_cube(side - 1, side - 1, n, 1), 1);
  cached.use(Schedule::fused, {});
  const double cached_cells = static_cast<double>(side) * side * n;
  result.in_cache = {"in cache, one thread", "in_cache_one_thread"};

  std::vector<Contender> contenders{
      {{"textbook loop", "textbook", 120.0},
       all,
       [&](long steps) { textbook.advance(static_cast<int>(steps)); }},
      {{"bare cube, plain sweeps", "plain", 72.0}, all, bare_with(Schedule::plain, {})},
      {{"bare cube, fused sweep", "fused", 48.0}, all, bare_with(Schedule::fused, {})},
      {{"bare cube, tiles", "tiles", tiled_bytes(result.bare_tiles)},
       all,
       bare_with(Schedule::tiles, result.bare_tiles)},
      {{"full scene, fused sweep", "full_fused"},
       all,
       [&](long steps) {
         full->marcher.use(Schedule::fused, {});
         full->advance(steps);
       }},
      {{"full scene, tiles", "full"}, all, [&](long steps) {
         full->marcher.use(Schedule::tiles, result.scene_tiles);
         full->advance(steps);
       }}};
  std::unique_ptr<Recorded<float>> one_thread;
  std::unique_ptr<Recorded<double>> twice;
  std::vector<std::unique_ptr<Marcher<float>>> shells;
  if (setting.more) {
    one_thread = std::make_unique<Recorded<float>>(full_speed_scene(n, 1, Precision::single_precision), 1);
    one_thread->settle(scene, result.scene_tiles);
    contenders.push_back({{"full scene, tiles, one thread", "full_one_thread"}, all, [&](long steps) {
                            one_thread->advance(steps);
                          }});
    const Problem in_double = full_speed_scene(n, threads, Precision::double_precision);
    twice = std::make_unique<Recorded<double>>(in_double, threads);
    twice->settle(in_double, setting.tiles);
    contenders.push_back({{"full scene, tiles, double precision", "full_double"}, all, [&](long steps) {
                            twice->advance(steps);
                          }});
    for (const FaceKind kind : {FaceKind::cfs_pml, FaceKind::moebius}) {
      shells.push_back(std::make_unique<Marcher<float>>(cube_in_shell(n, kind, threads), threads));
      Marcher<float>& marcher = *shells.back();
      marcher.use(Schedule::tiles, result.scene_tiles);
      contenders.push_back({{fmt::format("{} shell only, tiles", name_of(kind)), std::string(name_of(kind))},
                            all,
                            [&marcher](long steps) { marcher.advance(steps, {}); }});
    }
  }

  // The first round warms up.
  for (int round = 0; round <= setting.rounds; ++round) {
    const auto note = [&](SpeedRow& row, double amount, double seconds) {
      if (round > 0) row.rates.push_back(amount / seconds * 1e-9);
    };
    double bytes = 0.0;
    double seconds = seconds_of([&] { bytes = memory.copy(); });
    note(result.memory[0], bytes, seconds);
    seconds = seconds_of([&] { bytes = memory.triad(); });
    note(result.memory[1], bytes, seconds);
    const long cached_steps = std::max(8L, static_cast<long>(0.05 * all / cached_cells) * setting.steps);
    seconds = seconds_of([&] { cached.advance(cached_steps, {}); });
    note(result.in_cache, cached_cells * static_cast<double>(cached_steps), seconds);
    for (Contender& contender : contenders) {
      seconds = seconds_of([&] { contender.advance(setting.steps); });
      note(contender.row, contender.cells * setting.steps, seconds);
    }
  }
  for (Contender& contender : contenders) result.loops.push_back(std::move(contender.row));
  return result;
}

}  // namespace wanewall
