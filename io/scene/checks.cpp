#include "io/scene/checks.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "geometry/constants.hpp"
#include "io/scene/resolution.hpp"

namespace wanewall::scene {
namespace {

/// Pulse content at 2 cells per wavelength beyond which the surface cannot be fed: what lies there would be
/// cut off.
constexpr double most_at_lattice_end = 1e-6;
/// Pulse content at 4 cells per wavelength worth a warning.
constexpr double weak_at_coarse_end = 1e-3;
/// More memory than workstations have, for one purpose.
constexpr double most_bytes = 4e12;
/// Mean of a pulse, relative to its spectrum's peak, that leaves charge worth a warning behind a dipole.
constexpr double most_mean = 1e-4;

/// The lattice's frequency of a plane wave with two cells per wavelength along the axis where that happens
/// first.
double lattice_end_hz(const Problem& problem, const Medium& medium) {
  const Vec3 direction = propagation_of(*problem.plane_wave);
  double k_per_m = std::numeric_limits<double>::infinity();
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    k_per_m = std::min(k_per_m, pi / (std::abs(direction[i]) * problem.lattice.along(a).largest_cell_m()));
  }
  double sum = 0.0;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    const double d_m = problem.lattice.along(a).largest_cell_m();
    const double part = 2.0 / d_m * std::sin(0.5 * k_per_m * direction[i] * d_m);
    sum += part * part;
  }
  const double speed = c0_m_per_s / std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const double dt_s = problem.lattice.dt_s;
  return 2.0 / dt_s * std::asin(std::min(1.0, 0.5 * speed * dt_s * std::sqrt(sum))) / (2.0 * pi);
}

}  // namespace

void check_size(Cursor& root, const Scene& scene) {
  const Problem& problem = scene.problem;
  const auto bounded = [&](const Cursor& block, std::string_view key, const std::string& what, double bytes) {
    if (bytes > most_bytes)
      block.reject_text(key, fmt::format("{} needs {:.3g} bytes of memory", what, bytes),
                        fmt::format("at most {:.3g} bytes", most_bytes), "ask for less");
  };
  Cursor record = root.block("record");
  bounded(
      record, "points", "record.points",
      48.0 * static_cast<double>(problem.recording.points.size()) * static_cast<double>(problem.last_step()));
  double audited = 0.0;
  for (Side side : all_sides)
    if (problem.recording.audit.faces[static_cast<std::size_t>(index_of(side))])
      audited += 8.0 * problem.lattice.n_cells() / problem.lattice.cells(axis_of(side));
  bounded(record, "shell_audit", "record.shell_audit",
          16.0 * audited * static_cast<double>(problem.recording.audit.frequencies_hz.size()));
}

void check_scene(Cursor& root, Reading& reading, const Scene& scene) {
  check_objects(root, reading, scene);
  check_resolution(root, reading, scene);
  const int entry_medium = check_surface(root, reading, scene);
  check_pulse(root, reading, scene, entry_medium);
  check_size(root, scene);
}

void check_resolution(Cursor& root, Reading& reading, const Scene& scene) {
  const Problem& problem = scene.problem;
  const double cell_m = coarsest_cell_m(problem.lattice);
  Cursor mesh = root.block("mesh");
  for (int m : media_in_use(problem)) {
    const Medium& medium = problem.media[static_cast<std::size_t>(m)];
    if (medium.is_perfect()) continue;
    const WaveIn wave = wave_in(medium, scene.band_hi_hz);
    if (wave.loss_tangent > conductor_loss_tangent) {
      if (wave.depth_m < 2.0 * cell_m)
        reading.warn(
            mesh.place("cell"),
            fmt::format(
                "{} is a conductor at {}, and its depth of {} is less than two cells: what it absorbs is "
                "not resolved; for a good metal take a perfect_conductor",
                medium.name, format_quantity(scene.band_hi_hz, Family::frequency),
                format_quantity(wave.depth_m, Family::length, 3)));
      continue;
    }
    const double cells = wave.wavelength_m / cell_m;
    const std::string found = fmt::format("{} cells per wavelength in {} at {}", format_number(cells, 3),
                                          medium.name, format_quantity(scene.band_hi_hz, Family::frequency));
    const auto needed = [&](double n) { return format_quantity(wave.wavelength_m / n, Family::length, 3); };
    if (cells < fewest_cells_per_wavelength)
      mesh.reject_text(
          "cell", "mesh.cell leaves " + found,
          fmt::format("at least {} cells per wavelength, that is cells of at most {}; 10 or more ({}) for "
                      "good results",
                      format_number(fewest_cells_per_wavelength), needed(fewest_cells_per_wavelength),
                      needed(good_cells_per_wavelength)),
          "make the cells smaller or lower the high end of the band");
    if (cells < good_cells_per_wavelength)
      reading.warn(mesh.place("cell"),
                   fmt::format("only {}: phases will be off by more than a percent; cells of {} would "
                               "give 10",
                               found, needed(good_cells_per_wavelength)));
  }
}

void check_pulse(Cursor& root, Reading& reading, const Scene& scene, int entry_medium) {
  const Problem& problem = scene.problem;
  if (!problem.plane_wave && problem.dipoles.empty()) return;
  const Pulse& pulse = problem.plane_wave ? problem.plane_wave->pulse : problem.dipoles.front().pulse;
  const Cursor illumination = root.block("illumination");
  const Place place = illumination.place("pulse");
  const double peak_s = spectrum_peak_s(pulse);
  const auto relative_spectrum = [&](double f_hz) {
    return std::abs(spectrum(pulse, 2.0 * pi * f_hz)) / peak_s;
  };
  constexpr int points = 65;
  double weakest = 2.0, weakest_hz = scene.band_lo_hz;
  for (int n = 0; n < points; ++n) {
    const double f_hz = scene.band_lo_hz + (scene.band_hi_hz - scene.band_lo_hz) * n / (points - 1);
    const double level = relative_spectrum(f_hz);
    if (level < weakest) {
      weakest = level;
      weakest_hz = f_hz;
    }
  }
  const double weakest_db = 20.0 * std::log10(std::max(weakest, 1e-300));
  if (weakest_db < weakest_in_band_db)
    reading.warn(
        place,
        fmt::format("the pulse does not cover the band: at {} its spectrum is {:.0f} dB below its peak; "
                    "results there drown in rounding; `pulse: {{fits: band}}` covers the band",
                    format_quantity(weakest_hz, Family::frequency), -weakest_db));
  if (end_of_pulse_s(pulse) > problem.stop.at_s)
    reading.warn(place, fmt::format("the pulse ends at {}, after the run ends at {}",
                                    format_quantity(end_of_pulse_s(pulse), Family::time, 4),
                                    format_quantity(problem.stop.at_s, Family::time, 4)));
  if (!problem.dipoles.empty() && relative_spectrum(0.0) > most_mean)
    reading.warn(place,
                 "the pulse has a mean: a dipole leaves static fields behind that never decay; "
                 "modulated_gaussian, differentiated_gaussian and ricker have none");
  const Medium& medium = problem.media[static_cast<std::size_t>(entry_medium)];
  if (problem.plane_wave) {
    const double last_hz = lattice_end_hz(problem, medium);
    if (relative_spectrum(last_hz) > most_at_lattice_end)
      illumination.reject_text(illumination.has("pulse") ? "pulse" : "plane_wave",
                               fmt::format("the pulse holds {:.0f} dB of its peak at {}, where the plane "
                                           "wave has two cells per wavelength",
                                           20.0 * std::log10(relative_spectrum(last_hz)),
                                           format_quantity(last_hz, Family::frequency, 4)),
                               "a spectrum below -120 dB there, since the lattice carries no shorter waves",
                               "make the cells smaller, or the pulse smoother or lower in frequency");
  }
  const double n_index = std::sqrt(medium.permittivity_rel * medium.permeability_rel);
  const double coarse_hz =
      c0_m_per_s / (n_index * fewest_cells_per_wavelength * coarsest_cell_m(problem.lattice));
  if (relative_spectrum(coarse_hz) > weak_at_coarse_end)
    reading.warn(
        place,
        fmt::format("the pulse still holds {:.0f} dB of its peak at {}, where the lattice has 4 cells per "
                    "wavelength: these waves travel wrongly; take a smoother pulse or smaller cells",
                    20.0 * std::log10(relative_spectrum(coarse_hz)),
                    format_quantity(coarse_hz, Family::frequency, 3)));
  for (double f_hz : problem.recording.audit.frequencies_hz) {
    if (f_hz >= scene.band_lo_hz && f_hz <= scene.band_hi_hz) continue;  // told above
    if (relative_spectrum(f_hz) < std::pow(10.0, weakest_in_band_db / 20.0)) {
      reading.warn(place, fmt::format("the pulse is weak at {}, a frequency of the shell audit",
                                      format_quantity(f_hz, Family::frequency)));
      break;
    }
  }
}

}  // namespace wanewall::scene
