#include "solver/shell/surroundings.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <set>
#include <string>

#include "geometry/constants.hpp"
#include "geometry/painter.hpp"

namespace wanewall {
namespace {

constexpr double top_level = 1e-4;  ///< -80 dB
constexpr double least_wavelength_cells = 5.0;
constexpr double static_wavelength_cells = 20000.0;
constexpr int frequencies = 12, frequencies_with_statics = 18;
/// Samples of a face along each of its axes, and more inside the part that an object's bounds cover.
constexpr int face_samples = 128, object_samples = 9;

std::size_t at(Axis a) {
  return static_cast<std::size_t>(index_of(a));
}

Bounds clear_volume(const Lattice& lattice) {
  Bounds clear;
  for (Axis a : all_axes) {
    clear.lo_m[at(a)] = lattice.along(a).node_m(lattice.clear_node(side_of(a, false)));
    clear.hi_m[at(a)] = lattice.along(a).node_m(lattice.clear_node(side_of(a, true)));
  }
  return clear;
}

/// Cells along the axis at a side of the clear volume [m].
double cell_at(const Lattice& lattice, Side side) {
  const IndexRange cells = lattice.clear_cells(axis_of(side));
  return lattice.along(axis_of(side)).cell_m(is_high(side) ? cells.end - 1 : cells.begin);
}

/// Without the rounding of node positions, so that faces that are alike stay alike.
double six_digits(double value) {
  if (!(std::abs(value) > 0.0) || !std::isfinite(value)) return value;
  const double unit = std::pow(10.0, std::floor(std::log10(std::abs(value))) - 5.0);
  return std::round(value / unit) * unit;
}

/// Media half a cell outside the face.
std::vector<int> media_at(const Problem& problem, const Painter& painter, const Bounds& clear, Side side) {
  const Axis n = axis_of(side), u = next(n), v = previous(n);
  const double half = 0.5 * cell_at(problem.lattice, side);
  const double plane = is_high(side) ? clear.hi_m[at(n)] + half : clear.lo_m[at(n)] - half;
  std::set<int> found;
  const auto sample = [&](Vec3 lo, Vec3 hi, int count) {
    for (int i = 0; i < count; ++i)
      for (int k = 0; k < count; ++k) {
        Vec3 point{};
        point[at(n)] = plane;
        point[at(u)] = lo[at(u)] + (hi[at(u)] - lo[at(u)]) * (i + 0.5) / count;
        point[at(v)] = lo[at(v)] + (hi[at(v)] - lo[at(v)]) * (k + 0.5) / count;
        found.insert(painter.medium_at(point));
      }
  };
  sample(clear.lo_m, clear.hi_m, face_samples);
  for (const Object& object : problem.objects) {
    Bounds bounds = bounds_of(object.shape);
    if (bounds.lo_m[at(n)] > plane || bounds.hi_m[at(n)] < plane) continue;
    bool meets = true;
    for (Axis a : {u, v}) {
      bounds.lo_m[at(a)] = std::max(bounds.lo_m[at(a)], clear.lo_m[at(a)]);
      bounds.hi_m[at(a)] = std::min(bounds.hi_m[at(a)], clear.hi_m[at(a)]);
      meets = meets && bounds.lo_m[at(a)] < bounds.hi_m[at(a)];
    }
    if (meets) sample(bounds.lo_m, bounds.hi_m, object_samples);
  }
  std::vector<int> media;
  for (int m : found)
    if (!problem.media[static_cast<std::size_t>(m)].is_perfect()) media.push_back(m);
  if (media.empty()) media.push_back(problem.background);
  return media;
}

/// Nearest object or dipole that does not run on through the face.
void find_nearest(const Problem& problem, const Bounds& clear, Side side, FaceSurroundings& face) {
  const Axis n = axis_of(side);
  const double cell_m = cell_at(problem.lattice, side), slack_m = 1e-6 * cell_m;
  const double plane = (is_high(side) ? clear.hi_m : clear.lo_m)[at(n)];
  face.clearance_cells = std::numeric_limits<double>::infinity();
  const auto consider = [&](double nearest_m, const std::string& name) {
    const double cells = std::max(0.0, (is_high(side) ? plane - nearest_m : nearest_m - plane) / cell_m);
    if (cells < face.clearance_cells) {
      face.clearance_cells = cells;
      face.nearest = name;
    }
  };
  for (const Object& object : problem.objects) {
    if (object.medium == problem.background) continue;
    const Bounds bounds = bounds_of(object.shape);
    bool meets = true;
    for (Axis a : all_axes)
      meets = meets && bounds.lo_m[at(a)] <= clear.hi_m[at(a)] + slack_m &&
              bounds.hi_m[at(a)] >= clear.lo_m[at(a)] - slack_m;
    const double nearest_m = is_high(side) ? bounds.hi_m[at(n)] : bounds.lo_m[at(n)];
    const bool runs_through = is_high(side) ? nearest_m > plane + slack_m : nearest_m < plane - slack_m;
    if (meets && !runs_through) consider(nearest_m, object.label);
  }
  for (std::size_t d = 0; d < problem.dipoles.size(); ++d)
    consider(problem.dipoles[d].position_m[at(n)], "dipoles[" + std::to_string(d) + "]");
  if (face.nearest.empty()) face.clearance_cells = clearance_alone;
}

}  // namespace

double index_magnitude(const Medium& medium, double frequency_hz) {
  using Complex = std::complex<double>;
  const double omega = 2.0 * pi * frequency_hz;
  const Complex eps(medium.permittivity_rel, -medium.conductivity_s_per_m / (omega * eps0_f_per_m));
  const Complex mu(medium.permeability_rel, -medium.magnetic_conductivity_ohm_per_m / (omega * mu0_h_per_m));
  return std::sqrt(std::abs(eps * mu));
}

ShellSurroundings surroundings_of(const Problem& problem, double band_hi_hz) {
  ShellSurroundings all;
  const Lattice& lattice = problem.lattice;
  const Bounds clear = clear_volume(lattice);
  all.diagonal_m =
      std::hypot(clear.hi_m[0] - clear.lo_m[0], clear.hi_m[1] - clear.lo_m[1], clear.hi_m[2] - clear.lo_m[2]);
  std::vector<const Pulse*> pulses;
  if (problem.plane_wave) pulses.push_back(&problem.plane_wave->pulse);
  for (const Dipole& dipole : problem.dipoles) {
    // Most dipoles of a scene share one waveform.
    const bool known = std::any_of(pulses.begin(), pulses.end(), [&](const Pulse* p) {
      return p->kind == dipole.pulse.kind && p->centre_hz == dipole.pulse.centre_hz &&
             p->width_s == dipole.pulse.width_s && p->sample_time_s == dipole.pulse.sample_time_s &&
             p->sample_value == dipole.pulse.sample_value;
    });
    if (!known) pulses.push_back(&dipole.pulse);
  }
  for (const Pulse* pulse : pulses) {
    all.top_frequency_hz = std::max(all.top_frequency_hz, spectrum_end_hz(*pulse, top_level));
    if (std::abs(spectrum(*pulse, 0.0)) > top_level * spectrum_peak_s(*pulse)) all.has_statics = true;
  }
  if (pulses.empty()) all.top_frequency_hz = band_hi_hz;
  const Painter painter(lattice, problem.media, problem.objects, problem.background);
  double smallest_cell_m = std::numeric_limits<double>::infinity();
  for (Side side : all_sides) {
    FaceSurroundings& face = all.faces[static_cast<std::size_t>(index_of(side))];
    smallest_cell_m = std::min(smallest_cell_m, cell_at(lattice, side));
    if (!absorbs(problem.face(side).kind)) continue;
    find_nearest(problem, clear, side, face);
    face.media = media_at(problem, painter, clear, side);
  }
  const double longest_m = std::max(300.0 * smallest_cell_m, 8.0 * all.diagonal_m);
  all.is_long = c0_m_per_s * problem.stop.at_s > 2.0 * longest_m;
  return all;
}

DesignInputs design_inputs(const Problem& problem, const ShellSurroundings& surroundings, Side side,
                           const DesignOverrides& overrides) {
  const FaceSurroundings& face = surroundings.faces[static_cast<std::size_t>(index_of(side))];
  const double cell_m = cell_at(problem.lattice, side);
  DesignInputs inputs;
  inputs.courant = six_digits(c0_m_per_s * problem.lattice.dt_s / cell_m);
  inputs.diagonal_cells = six_digits(overrides.diagonal_m.value_or(surroundings.diagonal_m) / cell_m);
  inputs.clearance_cells = six_digits(overrides.clearance_cells.value_or(face.clearance_cells));
  inputs.alpha_min = 0.12 / inputs.diagonal_cells;
  const double top_hz = overrides.top_frequency_hz.value_or(surroundings.top_frequency_hz);
  const bool slow = overrides.statics.value_or(surroundings.has_statics || surroundings.is_long);
  const double shortest = std::max(least_wavelength_cells, six_digits(c0_m_per_s / (top_hz * cell_m)));
  const double longest =
      std::max({300.0, 8.0 * inputs.diagonal_cells, 2.0 * shortest, slow ? static_wavelength_cells : 0.0});
  const int count = slow ? frequencies_with_statics : frequencies;
  for (int n = 0; n < count; ++n) {
    DesignFrequency at_n;
    at_n.wavelength_cells = shortest * std::pow(longest / shortest, static_cast<double>(n) / (count - 1));
    const double hz = six_digits(c0_m_per_s / (at_n.wavelength_cells * cell_m));
    at_n.index = 0.0;
    for (int m : face.media)
      at_n.index = std::max(at_n.index, index_magnitude(problem.media[static_cast<std::size_t>(m)], hz));
    if (overrides.index) at_n.index = *overrides.index;
    inputs.frequencies.push_back(at_n);
  }
  return inputs;
}

}  // namespace wanewall
