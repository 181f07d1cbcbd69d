#include "io/scene/build_report.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"
#include "io/quantity.hpp"
#include "io/scene/resolution.hpp"
#include "io/scene/snapshot_size.hpp"
#include "io/scene/source.hpp"
#include "io/scene/text_table.hpp"
#include "io/terminal.hpp"
#include "solver/shell/design.hpp"

namespace wanewall::scene {
namespace {

using Rows = std::vector<std::vector<std::string>>;

std::string length_text(double m, int digits = 4) {
  return format_quantity(m, Family::length, digits);
}
std::string frequency_text(double hz) {
  return format_quantity(hz, Family::frequency, 4);
}

std::string cells_text(const Index3& n) {
  return fmt::format("{} x {} x {}", n[0], n[1], n[2]);
}

std::string count_text(double n) {
  return n < 1e6 ? fmt::format("{:.0f} in all", n) : fmt::format("{:.4g} million", 1e-6 * n);
}

Index3 clear_cells(const Lattice& lattice) {
  return {lattice.clear_cells(Axis::x).size(), lattice.clear_cells(Axis::y).size(),
          lattice.clear_cells(Axis::z).size()};
}

double extent_m(const MeshLines& lines, int first_node, int last_node) {
  return lines.node_m(last_node) - lines.node_m(first_node);
}

std::string time_text(double updates, const ReportOptions& options) {
  if (options.cells_per_second <= 0.0)
    return "not known: no such scene has been run here yet; 'wanewall check --time' measures";
  const double march_s = updates / options.cells_per_second;
  return fmt::format("about {}: {} to start, {} of marching at {:.3g} Gcell/s, measured {}",
                     duration_text(options.start_seconds + march_s), duration_text(options.start_seconds),
                     duration_text(march_s), options.cells_per_second * 1e-9,
                     options.is_measured_now ? "just now" : "in the last run of this kind here");
}

std::string lattice_part(const Scene& scene, const ReportOptions& options) {
  const Problem& problem = scene.problem;
  const Lattice& lattice = problem.lattice;
  std::array<std::string, 3> extent, cell;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    extent[i] = length_text(extent_m(lattice.along(a), lattice.clear_node(side_of(a, false)),
                                     lattice.clear_node(side_of(a, true))));
    cell[i] = length_text(lattice.along(a).smallest_cell_m());
  }
  const double steps = static_cast<double>(problem.last_step());
  const double updates = steps * lattice.n_cells();
  std::string end = fmt::format("at most {}, to {}", problem.last_step(),
                                format_quantity(problem.stop.at_s, Family::time, 4));
  if (problem.stop.energy_below_db)
    end += fmt::format("; or until the energy is {} below its peak",
                       format_quantity(-*problem.stop.energy_below_db, Family::level, 4));
  return "Lattice\n" +
         aligned_pairs(
             {{"clear volume", fmt::format("{} cells, {} x {} x {}", cells_text(clear_cells(lattice)),
                                           extent[0], extent[1], extent[2])},
              {"with shell",
               fmt::format("{} cells, {}", cells_text(lattice.cells()), count_text(lattice.n_cells()))},
              {"cell", fmt::format("{} x {} x {}", cell[0], cell[1], cell[2])},
              {"time step",
               fmt::format("{}, Courant number {}", format_quantity(lattice.dt_s, Family::time, 6),
                           format_number(lattice.courant_number(), 4))},
              {"steps", end},
              {"work", fmt::format("{:.3g} cell updates", updates)},
              {"time", time_text(updates, options)},
              {"storage",
               problem.precision == Precision::single_precision ? "single precision" : "double precision"}});
}

std::string memory_part(const Problem& problem, const Footprint& footprint, const ReportOptions& options) {
  const double bare = footprint.total() - footprint.audit;
  Rows rows{
      {"fields", bytes_text(footprint.fields)},     {"layer memory", bytes_text(footprint.layer_memory)},
      {"media", bytes_text(footprint.media)},       {"snapshots", bytes_text(footprint.snapshots)},
      {"other", bytes_text(footprint.other)},       {"without the audit", bytes_text(bare)},
      {"shell audit", bytes_text(footprint.audit)}, {"total", bytes_text(footprint.total())}};
  if (options.machine_bytes > 0.0) rows.push_back({"this machine has", bytes_text(options.machine_bytes)});
  const double disk = snapshot_values(problem) * static_cast<double>(bytes_of(problem.precision));
  std::string text = "Memory\n" + aligned(rows);
  if (disk > 0.0) text += fmt::format("  Snapshots hold {} before compression, on disk.\n", bytes_text(disk));
  return text;
}

std::string media_part(const Scene& scene) {
  const double cell_m = coarsest_cell_m(scene.problem.lattice);
  const std::string lo = frequency_text(scene.band_lo_hz), hi = frequency_text(scene.band_hi_hz);
  Rows rows{{"medium", "eps", "mu", "sigma", "wavelength, " + lo, "cells", "wavelength, " + hi, "cells",
             "depth, " + hi}};
  for (int m : media_in_use(scene.problem)) {
    const Medium& medium = scene.problem.media[static_cast<std::size_t>(m)];
    if (medium.is_perfect()) {
      rows.push_back({medium.name +
                      (medium.perfect_electric ? " (perfect conductor)" : " (perfect magnetic conductor)")});
      continue;
    }
    const WaveIn at_lo = wave_in(medium, scene.band_lo_hz), at_hi = wave_in(medium, scene.band_hi_hz);
    rows.push_back({medium.name, format_number(medium.permittivity_rel, 4),
                    format_number(medium.permeability_rel, 4),
                    format_quantity(medium.conductivity_s_per_m, Family::conductivity, 4),
                    length_text(at_lo.wavelength_m), format_number(at_lo.wavelength_m / cell_m, 3),
                    length_text(at_hi.wavelength_m), format_number(at_hi.wavelength_m / cell_m, 3),
                    std::isfinite(at_hi.depth_m) ? length_text(at_hi.depth_m, 3) : "no loss"});
  }
  return "Media (cells per wavelength with the largest cell)\n" + aligned(rows);
}

std::string pulse_text(const Pulse& pulse) {
  if (pulse.kind == Pulse::Kind::samples)
    return fmt::format("{} samples from {} to {}", pulse.sample_time_s.size(),
                       format_quantity(pulse.sample_time_s.front(), Family::time, 4),
                       format_quantity(pulse.sample_time_s.back(), Family::time, 4));
  std::string text(name_of(pulse.kind));
  if (pulse.kind == Pulse::Kind::modulated_gaussian) text += ", centre " + frequency_text(pulse.centre_hz);
  return text + fmt::format(", width {}, delay {}, ends at {}",
                            format_quantity(pulse.width_s, Family::time, 4),
                            format_quantity(pulse.delay_s, Family::time, 4),
                            format_quantity(end_of_pulse_s(pulse), Family::time, 4));
}

std::string surface_text(const Problem& problem, const PlaneWave& wave) {
  std::string faces;
  for (Side side : all_sides)
    if (wave.box_face[static_cast<std::size_t>(index_of(side))]) faces += fmt::format(" {}", name_of(side));
  const Index3 size{wave.box_hi[0] - wave.box_lo[0], wave.box_hi[1] - wave.box_lo[1],
                    wave.box_hi[2] - wave.box_lo[2]};
  std::string range;
  for (Axis a : all_axes) {
    const auto i = static_cast<std::size_t>(index_of(a));
    range += fmt::format("{}{} {} to {}", i == 0 ? "" : ", ", name_of(a),
                         length_text(problem.lattice.along(a).node_m(wave.box_lo[i])),
                         length_text(problem.lattice.along(a).node_m(wave.box_hi[i])));
  }
  return fmt::format("{} cells, {}; faces{}", cells_text(size), range, faces);
}

std::string illumination_part(const Scene& scene) {
  const Problem& problem = scene.problem;
  Rows rows;
  const Pulse* pulse = nullptr;
  if (problem.plane_wave) {
    const PlaneWave& wave = *problem.plane_wave;
    pulse = &wave.pulse;
    rows.push_back(
        {"plane wave", fmt::format("from theta {}, phi {}, E turned by {}, peak {}",
                                   format_quantity(wave.theta_rad, Family::angle, 5),
                                   format_quantity(wave.phi_rad, Family::angle, 5),
                                   format_quantity(wave.e_angle_rad, Family::angle, 5),
                                   format_quantity(wave.peak_v_per_m, Family::electric_field, 4))});
    rows.push_back({"surface", surface_text(problem, wave)});
  }
  if (!problem.dipoles.empty()) {
    pulse = &problem.dipoles.front().pulse;
    rows.push_back({"dipoles", fmt::format("{}", problem.dipoles.size())});
  }
  if (pulse == nullptr) return "Illumination\n  none: all fields will be zero\n";
  rows.push_back({"pulse", pulse_text(*pulse)});
  std::string text = "Illumination\n" + aligned_pairs(rows);
  std::vector<std::string> at{"frequency"}, level{"spectrum, peak at 0 dB"};
  constexpr int points = 9;
  const double peak_s = spectrum_peak_s(*pulse);
  for (int n = 0; n < points; ++n) {
    const double f_hz = scene.band_lo_hz + (scene.band_hi_hz - scene.band_lo_hz) * n / (points - 1);
    at.push_back(frequency_text(f_hz));
    const double level_db =
        20.0 * std::log10(std::max(std::abs(spectrum(*pulse, 2.0 * pi * f_hz)) / peak_s, 1e-15));
    level.push_back(fmt::format("{:.1f} dB", level_db > -0.05 ? 0.0 : level_db));
  }
  return text + aligned({at, level});
}

/// How a face came to its cells.
std::string reason_text(const Scene& scene, Side side) {
  const auto s = static_cast<std::size_t>(index_of(side));
  const FaceDesign& design = scene.designs[s];
  if (design.origin == FaceDesign::Origin::listed) return "listed";
  if (design.origin == FaceDesign::Origin::polynomial) return "polynomial";
  if (design.goal_db) {
    const bool meets =
        design.figures && design.figures->mean_db <= *design.goal_db - design_margin_db(*design.goal_db);
    return fmt::format("{} for {:.0f} dB", meets ? "fewest" : "best", *design.goal_db);
  }
  for (const UsedValue& value : scene.used)
    if (value.path == fmt::format("shell.faces.{}.cells", name_of(side)) && value.by_default)
      return scene.problem.precision == Precision::single_precision ? "default in single"
                                                                    : "default in double";
  return "given";
}

std::string shell_part(const Scene& scene) {
  Rows rows{{"face", "kind", "cells", "why", "expected", "clearance", "nearest", "index", "R(0)"}};
  for (Side side : all_sides) {
    const auto s = static_cast<std::size_t>(index_of(side));
    const Face& face = scene.problem.face(side);
    if (!has_layer(face.kind)) {
      const std::string order =
          face.kind == FaceKind::one_way ? fmt::format("order {}", face.one_way_order) : "";
      rows.push_back({std::string(name_of(side)), std::string(name_of(face.kind)), "0", order});
      continue;
    }
    const FaceDesign& design = scene.designs[s];
    std::vector<std::string> row{std::string(name_of(side)), std::string(name_of(face.kind)),
                                 fmt::format("{}", face.cells()), reason_text(scene, side)};
    if (design.inputs) {
      const std::string& nearest = scene.surroundings.faces[s].nearest;
      row.push_back(fmt::format("{:.1f} dB", design.figures->mean_db));
      row.push_back(format_number(design.inputs->clearance_cells, 4));
      row.push_back(nearest.empty() ? "-" : nearest);
      row.push_back(format_number(design.inputs->frequencies.front().index, 4));
    } else {
      row.insert(row.end(), 4, "-");
    }
    row.push_back(design.origin == FaceDesign::Origin::polynomial
                      ? fmt::format("{:.1f} dB", continuum_reflection_db(scene.problem, side))
                      : "-");
    rows.push_back(std::move(row));
  }
  return "Shell (expected: mean over near fields; errors in time are up to 10 dB above it, 15 dB below -100 "
         "dB;\n"
         "clearance in cells to the nearest object or dipole; R(0): continuum, normal incidence, in the\n"
         "background. What the lattice reflects: wanewall shell predict)\n" +
         aligned(rows);
}

std::string objects_part(const Scene& scene) {
  if (scene.problem.objects.empty()) return "Objects\n  none\n";
  constexpr std::size_t most_listed = 40;
  Rows rows{{"object", "medium", "x", "y", "z"}};
  for (const Object& object : scene.problem.objects) {
    if (rows.size() > most_listed) break;
    const Bounds bounds = bounds_of(object.shape);
    std::vector<std::string> row{object.label,
                                 scene.problem.media[static_cast<std::size_t>(object.medium)].name};
    for (std::size_t i = 0; i < 3; ++i) {
      const bool lo = std::isfinite(bounds.lo_m[i]), hi = std::isfinite(bounds.hi_m[i]);
      row.push_back(lo && hi
                        ? fmt::format("{} to {}", length_text(bounds.lo_m[i]), length_text(bounds.hi_m[i]))
                    : lo ? "from " + length_text(bounds.lo_m[i])
                    : hi ? "up to " + length_text(bounds.hi_m[i])
                         : "all");
    }
    rows.push_back(std::move(row));
  }
  std::string text =
      "Objects (the box that holds each; a later one covers an earlier one)\n" + aligned_pairs(rows);
  if (scene.problem.objects.size() > most_listed)
    text += fmt::format("  and {} more\n", scene.problem.objects.size() - most_listed);
  return text;
}

std::string record_part(const Problem& problem) {
  Rows rows;
  rows.push_back({"points", fmt::format("{}", problem.recording.points.size())});
  for (const SnapshotRequest& request : problem.recording.snapshots) {
    std::string fields;
    for (Component c : request.components)
      fields += fmt::format("{}{}", fields.empty() ? "" : " ", name_of(c));
    std::string where = "volume";
    if (request.normal)
      where = fmt::format("plane {} = {}", name_of(*request.normal),
                          length_text(request.lo_m[static_cast<std::size_t>(index_of(*request.normal))]));
    rows.push_back({request.name, fmt::format("{}, {}, every {} steps, stride {}", where, fields,
                                              request.every, request.stride)});
  }
  rows.push_back({"energy", fmt::format("every {} steps", problem.recording.energy_every)});
  const AuditRequest& audit = problem.recording.audit;
  if (audit.frequencies_hz.empty()) {
    rows.push_back({"shell audit", "off"});
  } else {
    std::string faces;
    for (Side side : all_sides)
      if (audit.faces[static_cast<std::size_t>(index_of(side))]) faces += fmt::format(" {}", name_of(side));
    rows.push_back(
        {"shell audit", fmt::format("{} frequencies from {} to {}, faces{}", audit.frequencies_hz.size(),
                                    frequency_text(audit.frequencies_hz.front()),
                                    frequency_text(audit.frequencies_hz.back()), faces)});
  }
  return "Record\n" + aligned_pairs(rows);
}

std::string values_part(const Scene& scene) {
  Rows rows;
  for (const UsedValue& value : scene.used)
    rows.push_back({value.path, shown(value.value), value.by_default ? "default" : ""});
  return "Values used\n" + aligned_pairs(rows);
}

}  // namespace

double continuum_reflection_db(const Problem& problem, Side side) {
  const Face& face = problem.face(side);
  const LayerTable& layer = face.layer;
  const Medium& background = problem.media[static_cast<std::size_t>(problem.background)];
  const double index = std::sqrt(background.permittivity_rel * background.permeability_rel);
  const double cell_m = problem.lattice.along(axis_of(side)).smallest_cell_m();
  // Simpson's rule over each cell; the table ends half a cell before the outer wall, where the value is
  // carried on by the cubic through the last samples.
  double integral = 0.0;
  for (const double sigma : face.moebius.sigma_s_per_m) integral += sigma * cell_m;
  const int n = layer.cells();
  const auto e = [&](int d) { return layer.sigma_e_s_per_m[static_cast<std::size_t>(d)]; };
  const auto h = [&](int d) { return layer.sigma_h_s_per_m[static_cast<std::size_t>(d)]; };
  for (int d = 0; d < n; ++d) {
    double next = 0.0;
    if (d + 1 < n)
      next = e(d + 1);
    else
      next = n > 1 ? 4.0 * h(d) - 6.0 * e(d) + 4.0 * h(d - 1) - e(d - 1) : 2.0 * h(d) - e(d);
    integral += cell_m / 6.0 * (e(d) + 4.0 * h(d) + next);
  }
  return 20.0 * std::log10(std::exp(1.0)) * -2.0 * index * eta0_ohm * integral;
}

std::string build_report(const Scene& scene, const Footprint& footprint, const ReportOptions& options) {
  std::string text = fmt::format("{}\n  {}, {} to {}\n", shown(scene.title), shown(scene.file),
                                 frequency_text(scene.band_lo_hz), frequency_text(scene.band_hi_hz));
  for (const std::string& part :
       {lattice_part(scene, options), memory_part(scene.problem, footprint, options), media_part(scene),
        illumination_part(scene), shell_part(scene), objects_part(scene), record_part(scene.problem)})
    text += "\n" + part;
  if (options.with_values) text += "\n" + values_part(scene);
  text += "\nWarnings\n";
  for (const std::string& warning : scene.warnings) text += "  " + warning + "\n";
  if (options.machine_bytes > 0.0 && footprint.total() > options.machine_bytes)
    text += fmt::format(
        "  the run needs {} and this machine has {}: make cells larger, the volume smaller, or record less\n",
        bytes_text(footprint.total()), bytes_text(options.machine_bytes));
  else if (scene.warnings.empty())
    text += "  none\n";
  return text;
}

}  // namespace wanewall::scene
