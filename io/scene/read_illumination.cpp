// What lights the scene: pulse, plane wave with its surface, dipoles.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>

#include "geometry/constants.hpp"
#include "io/csv.hpp"
#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

Pulse read_samples(Cursor& pulse_block, const Reading& reading) {
  Cursor block = pulse_block.block("samples");
  const std::string name = block.text("file");
  if (name.empty()) block.reject("file", "the name of a CSV file", "name the file");
  const std::filesystem::path file = std::filesystem::path(reading.folder) / name;
  Samples samples = read_samples_csv(file.string());
  Pulse pulse;
  pulse.kind = Pulse::Kind::samples;
  double peak = 0.0;
  for (double v : samples.value) peak = std::max(peak, std::abs(v));
  if (!(peak > 0.0))
    block.reject("file", "samples that are not all zero", "check the second column of the file");
  for (double& v : samples.value) v /= peak;
  const double delay_s = pulse_block.has("delay") ? pulse_block.quantity("delay") : 0.0;
  for (double& t : samples.time_s) t += delay_s;
  if (samples.time_s.front() < 0.0)
    block.reject_text(
        "file",
        fmt::format("{}: the first sample is at {}", block.path("file"),
                    format_quantity(samples.time_s.front(), Family::time)),
        "samples from 0 s on; runs start there",
        fmt::format("set pulse.delay to {} or more", format_quantity(-samples.time_s.front(), Family::time)));
  pulse.sample_time_s = std::move(samples.time_s);
  pulse.sample_value = std::move(samples.value);
  return pulse;
}

Pulse read_pulse(Cursor& illumination, const Scene& scene, const Reading& reading) {
  Cursor block = illumination.block("pulse");
  if (block.has("samples")) return read_samples(block, reading);
  Pulse pulse;
  if (block.has("fits")) {
    block.word("fits");
    pulse = modulated_gaussian_for_band(scene.band_lo_hz, scene.band_hi_hz);
  } else if (block.has("modulated_gaussian")) {
    Cursor shape = block.block("modulated_gaussian");
    pulse.kind = Pulse::Kind::modulated_gaussian;
    pulse.centre_hz = shape.quantity("centre");
    pulse.width_s = shape.quantity("width");
  } else if (block.has("gaussian")) {
    pulse.kind = Pulse::Kind::gaussian;
    pulse.width_s = block.block("gaussian").quantity("width");
  } else if (block.has("differentiated_gaussian")) {
    pulse.kind = Pulse::Kind::differentiated_gaussian;
    pulse.width_s = block.block("differentiated_gaussian").quantity("width");
  } else {
    Cursor shape = block.block("ricker");
    pulse.kind = Pulse::Kind::ricker;
    pulse.width_s = shape.has("width") ? shape.quantity("width")
                                       : std::sqrt(2.0) / (2.0 * pi * shape.quantity("peak_frequency"));
  }
  if (block.has("delay")) {
    pulse.delay_s = block.quantity("delay");
  } else {
    pulse.delay_s = pulse_start_in_widths * pulse.width_s;
    block.use("delay", format_quantity(pulse.delay_s, Family::time));
  }
  return pulse;
}

constexpr double perpendicular = 1e-9;  ///< cosine below which two directions count as perpendicular

/// A wave along a periodic axis would need a phase shift between the two faces. A wall beside the wave would
/// cut the surface where its edges are not those of the medium, so walls may only stand straight ahead of the
/// wave, where no side of the surface ends on them.
void check_sides(const Cursor& block, const Problem& problem, const PlaneWave& wave) {
  const Vec3 k = propagation_of(wave);
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    if (problem.lattice.periodic[i] && std::abs(k[i]) > perpendicular)
      block.reject_text("from",
                        fmt::format("the plane wave travels along {}, whose faces are periodic", name_of(a)),
                        "waves that travel at right angles to every periodic axis (normal incidence)",
                        fmt::format("turn the wave, or make {}- and {}+ absorbing", name_of(a), name_of(a)));
  }
  for (Side side : all_sides) {
    const FaceKind kind = problem.face(side).kind;
    if (absorbs(kind) || kind == FaceKind::periodic) continue;
    const Axis a = axis_of(side);
    const double outward = (is_high(side) ? 1.0 : -1.0) * k[static_cast<std::size_t>(index_of(a))];
    const bool is_ahead = outward > 1.0 - perpendicular;
    const auto is_periodic = [&](Axis across) {
      return problem.lattice.periodic[static_cast<std::size_t>(index_of(across))];
    };
    if (is_ahead && is_periodic(next(a)) && is_periodic(previous(a))) continue;
    block.reject_text(
        "from",
        fmt::format("the plane wave and the {} at {} do not go together", name_of(kind), name_of(side)),
        "a wall only straight ahead of the wave, with periodic faces on the four sides between",
        fmt::format("make {} absorbing or, at normal incidence, periodic; for a metal ground paint a perfect "
                    "conductor",
                    name_of(side)));
  }
}

/// The total-field box. See PlaneWave: a face exists where the wave must be let in or out.
void place_surface(Cursor& block, const Problem& problem, PlaneWave& wave) {
  const Lattice& lattice = problem.lattice;
  const int inset = static_cast<int>(block.quantity("surface_inset"));
  check_sides(block, problem, wave);
  const Vec3 k = propagation_of(wave);
  const bool is_column = std::count(lattice.periodic.begin(), lattice.periodic.end(), true) == 2;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    for (bool high : {false, true}) {
      const Side side = side_of(a, high);
      const auto s = static_cast<std::size_t>(index_of(side));
      // In a column only the face where the wave enters exists; the total field runs on to the other end.
      const bool is_exit = is_column && (high ? k[i] : -k[i]) > 0.5;
      wave.box_face[s] = absorbs(problem.face(side).kind) && !is_exit;
      const int node = lattice.clear_node(side) + (wave.box_face[s] ? (high ? -inset : inset) : 0);
      (high ? wave.box_hi : wave.box_lo)[i] = node;
    }
    const int least = lattice.periodic[i] ? 1 : 2;
    const int has = wave.box_hi[i] - wave.box_lo[i];
    if (has < least)
      block.reject_text(
          "surface_inset",
          fmt::format("the clear volume has {} cells along {}, and a surface {} cells inside it leaves {}",
                      lattice.clear_cells(a).size(), name_of(a), inset, std::max(0, has)),
          fmt::format("at least {} cells inside the surface, so at least {} in the clear volume", least,
                      lattice.clear_cells(a).size() - has + least),
          "make clear_volume larger or the cells smaller");
  }
}

PlaneWave read_plane_wave(Cursor& block, const Problem& problem, const Pulse& pulse) {
  PlaneWave wave;
  Cursor from = block.block("from");
  wave.theta_rad = from.quantity("theta");
  wave.phi_rad = from.quantity("phi");
  wave.e_angle_rad = block.quantity("e_angle");
  wave.peak_v_per_m = block.quantity("peak");
  wave.pulse = pulse;
  place_surface(block, problem, wave);
  return wave;
}

Dipole read_dipole(Cursor& block, const Problem& problem, const Pulse& pulse) {
  Dipole dipole;
  dipole.is_magnetic = block.has("magnetic");
  const char* key = dipole.is_magnetic ? "magnetic" : "electric";
  dipole.moment = block.vec3(key);
  if (dipole.moment == Vec3{})
    block.reject(key, "a moment that is not zero", "give it a moment or remove the dipole");
  dipole.position_m = block.vec3("at");
  const Bounds clear = clear_bounds(problem.lattice, 0.0);
  if (!lies_in(clear_bounds(problem.lattice, 1e-6), dipole.position_m))
    block.reject("at", "positions in the clear volume: " + bounds_text(clear),
                 "move the dipole or widen clear_volume");
  dipole.pulse = pulse;
  return dipole;
}

}  // namespace

void read_illumination(Cursor& root, Reading& reading, Scene& scene) {
  if (!root.has("illumination")) {
    if (scene.problem.objects.empty())
      root.reject_text("illumination", "the scene has neither objects nor illumination",
                       "objects, illumination, or both", "add `illumination:` with a plane_wave or dipoles");
    reading.warn({}, "nothing lights the scene: all fields will be zero; add `illumination:`");
    return;
  }
  Cursor illumination = root.block("illumination");
  const Pulse pulse = read_pulse(illumination, scene, reading);
  if (illumination.has("plane_wave")) {
    Cursor block = illumination.block("plane_wave");
    scene.problem.plane_wave = read_plane_wave(block, scene.problem, pulse);
  }
  for (Cursor& block : illumination.blocks("dipoles"))
    scene.problem.dipoles.push_back(read_dipole(block, scene.problem, pulse));
}

}  // namespace wanewall::scene
