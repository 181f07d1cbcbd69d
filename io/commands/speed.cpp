// `wanewall speed`: how fast this machine advances fields, beside the loop that everybody writes first.
#include <fmt/format.h>
#include <omp.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <functional>
#include <memory>

#include "geometry/constants.hpp"
#include "io/commands.hpp"
#include "io/provenance.hpp"
#include "solver/marcher.hpp"
#include "solver/textbook_loop.hpp"

namespace wanewall {
namespace {

struct Options {
  int cells = 300;
  int steps = 10;
  int repeats = 5;
  int threads = 0;
};

constexpr double cell_m = 1e-3;
constexpr double courant = 0.99;

Problem bare_cube(int cells, Schedule schedule, int threads) {
  Problem problem;
  problem.media.push_back({"vacuum", 1.0, 1.0, 0.0, 0.0, false, false});
  for (auto& lines : problem.lattice.lines) lines = MeshLines::uniform(0.0, cell_m, cells);
  problem.lattice.dt_s = courant * problem.lattice.courant_limit_s();
  problem.schedule = schedule;
  problem.threads = threads;
  return problem;
}

constexpr int shell_cells = 10;

/// The same clear cube inside a shell on six faces. What the layers' numbers are makes no difference to the
/// time.
Problem cube_in_shell(int clear_cells, FaceKind kind, int threads) {
  Problem problem = bare_cube(clear_cells + 2 * shell_cells, Schedule::fused, threads);
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

/// The cube in its Moebius shell, crossed by an oblique plane wave.
Problem full_scene(int clear_cells, int threads) {
  constexpr int inset = 6;
  Problem problem = cube_in_shell(clear_cells, FaceKind::moebius, threads);
  PlaneWave wave;
  wave.theta_rad = 37.3 * pi / 180.0;
  wave.phi_rad = 71.9 * pi / 180.0;
  wave.e_angle_rad = 0.25 * pi;
  wave.pulse = modulated_gaussian_for_band(c0_m_per_s / (40.0 * cell_m), c0_m_per_s / (12.0 * cell_m));
  for (std::size_t a = 0; a < 3; ++a) {
    wave.box_lo[a] = shell_cells + inset;
    wave.box_hi[a] = shell_cells + clear_cells - inset;
  }
  problem.plane_wave = wave;
  return problem;
}

/// Both must compute the same thing before either is timed.
double largest_difference(int threads) {
  constexpr int n = 32, steps = 40;
  TextbookLoop loop(n, static_cast<float>(courant / std::sqrt(3.0)), threads);
  Marcher<float> marcher(bare_cube(n, Schedule::fused, threads), threads);
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

struct Contender {
  std::string name;
  double cells;
  std::function<void(int)> advance;
  std::vector<double> rates{};  // Gcell/s, one per repeat

  double median() const {
    std::vector<double> sorted = rates;
    std::sort(sorted.begin(), sorted.end());
    return sorted[sorted.size() / 2];
  }
};

ExitCode measure(const Options& options) {
  const int threads = options.threads > 0 ? options.threads : omp_get_num_procs();
  const double difference = largest_difference(threads);
  if (!(difference < 1e-5))
    throw std::logic_error(fmt::format("the textbook loop and the solver differ by {:.2e}", difference));
  const auto n = static_cast<double>(options.cells);
  TextbookLoop loop(options.cells, static_cast<float>(courant / std::sqrt(3.0)), threads);
  Marcher<float> plain(bare_cube(options.cells, Schedule::plain, threads), threads);
  Marcher<float> fused(bare_cube(options.cells, Schedule::fused, threads), threads);
  const Problem scene = full_scene(options.cells, threads);
  Marcher<float> full(scene, threads);
  Marcher<float> cfs(cube_in_shell(options.cells, FaceKind::cfs_pml, threads), threads);
  Marcher<float> moebius(cube_in_shell(options.cells, FaceKind::moebius, threads), threads);
  std::vector<Contender> contenders{
      {"textbook loop", n * n * n, [&](int steps) { loop.advance(steps); }},
      {"plain sweeps, bare cube", n * n * n, [&](int steps) { plain.advance(steps, {}); }},
      {"fused sweep, bare cube", n * n * n, [&](int steps) { fused.advance(steps, {}); }},
      {"fused, in a cfs_pml shell", scene.lattice.n_cells(), [&](int steps) { cfs.advance(steps, {}); }},
      {"fused, in a moebius shell", scene.lattice.n_cells(), [&](int steps) { moebius.advance(steps, {}); }},
      {"fused sweep, full scene", scene.lattice.n_cells(), [&](int steps) { full.advance(steps, {}); }}};
  // The first round warms up; then all take turns, so that a machine that slows down slows all.
  for (int repeat = 0; repeat <= options.repeats; ++repeat) {
    for (Contender& contender : contenders) {
      const auto start = std::chrono::steady_clock::now();
      contender.advance(options.steps);
      const double seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - start).count();
      if (repeat > 0) contender.rates.push_back(contender.cells * options.steps / seconds * 1e-9);
    }
  }
  const double held = static_cast<double>(full.field_bytes() + full.layer_bytes() + full.media_bytes());
  fmt::print("processor: {}, {} threads, {} code, single precision, Courant number {}\n",
             provenance_of_program().processor, threads, full.vector_code(), courant);
  fmt::print(
      "cube of {} cells; in a shell: the cube as clear volume, {} layer cells on six faces, all {} cells "
      "counted; full scene: moebius shell and an oblique plane wave\n",
      options.cells, shell_cells, scene.lattice.n_cells());
  fmt::print("{} rounds of {} steps in turn; textbook loop and solver agree to {:.1e}\n\n", options.repeats,
             options.steps, difference);
  fmt::print("| {:<25} | median [Gcell/s] | least [Gcell/s] | most [Gcell/s] | over the textbook loop |\n",
             "what");
  fmt::print("| {:-<25} | ---------------: | --------------: | -------------: | ---------------------: |\n",
             "");
  for (const Contender& contender : contenders) {
    const auto [least, most] = std::minmax_element(contender.rates.begin(), contender.rates.end());
    fmt::print("| {:<25} | {:16.3f} | {:15.3f} | {:14.3f} | {:22.2f} |\n", contender.name, contender.median(),
               *least, *most, contender.median() / contenders[0].median());
  }
  fmt::print("\nmoebius shell over cfs_pml shell: {:.3f}\n", contenders[4].median() / contenders[3].median());
  const auto layer_words = [&](const Marcher<float>& m) {
    return static_cast<double>(m.layer_bytes()) / (scene.lattice.n_cells() - n * n * n);
  };
  fmt::print("layer memory per shell cell: cfs_pml {:.1f}, moebius {:.1f} bytes\n", layer_words(cfs),
             layer_words(moebius));
  fmt::print("memory of the full scene: {:.1f} bytes per clear cell (fields, layers, media)\n",
             held / (n * n * n));
  return ExitCode::done;
}

}  // namespace

void add_speed_command(CLI::App& app, Action& action) {
  auto options = std::make_shared<Options>();
  CLI::App* command =
      app.add_subcommand("speed", "Measure this machine against the loop that everybody writes first");
  command->add_option("--cells", options->cells, "Cells along each edge of the cube")
      ->check(CLI::Range(16, 1024))
      ->capture_default_str();
  command->add_option("--steps", options->steps, "Steps in a round")
      ->check(CLI::Range(1, 10000))
      ->capture_default_str();
  command->add_option("--repeats", options->repeats, "Rounds that count")
      ->check(CLI::Range(1, 100))
      ->capture_default_str();
  command->add_option("--threads", options->threads, "Threads; 0: one per processor")
      ->check(CLI::Range(0, 1024));
  command->footer("Example:\n  wanewall speed --cells 200 --repeats 3");
  command->callback([options, &action] { action = [options] { return measure(*options); }; });
}

}  // namespace wanewall
