#include "postproc/reflection_table.hpp"

#include <algorithm>
#include <cmath>
#include <exception>
#include <limits>
#include <numeric>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "postproc/audit_planes.hpp"
#include "postproc/face_split.hpp"
#include "postproc/face_theory.hpp"

namespace wanewall {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double least_share_db = -20.0;

double db_of_power(double ratio) {
  return ratio > 0.0 ? 10.0 * std::log10(ratio) : -infinity;
}
double db_of_field(double ratio) {
  return ratio > 0.0 ? 20.0 * std::log10(ratio) : -infinity;
}

AngleReading reading_of(const SplitPower& power, double face_outgoing) {
  AngleReading reading;
  reading.outgoing_w_s2 = power.outgoing;
  reading.returned_w_s2 = power.returned;
  reading.share_db = face_outgoing > 0.0 ? db_of_power(power.outgoing / face_outgoing) : -infinity;
  reading.reflection = reflection_of(power.outgoing, power.returned, power.floor);
  if (power.expected > 0.0 && power.outgoing > 0.0)
    reading.expected_db = db_of_power(power.expected / power.outgoing);
  reading.waves = power.waves;
  reading.not_illuminated = reading.share_db < least_share_db;
  return reading;
}

AngleSum angle_sum(const SplitPower& power, double face_outgoing) {
  const AngleReading reading = reading_of(power, face_outgoing);
  return {reading.outgoing_w_s2, reading.returned_w_s2,   reading.share_db,
          reading.reflection,    reading.not_illuminated, reading.expected_db};
}

WholeReading whole_reading(const WholePlane& whole) {
  WholeReading reading;
  reading.reflection = reflection_of(1.0, whole.returned * whole.returned, whole.floor * whole.floor);
  if (whole.expected) reading.expected_db = db_of_field(*whole.expected);
  if (whole.closure) reading.closure_db = db_of_field(*whole.closure);
  return reading;
}

// Plane waves over the periods of both axes are the lattice's own modes already.
bool uses_modes(const Lattice& lattice, const AuditRecord& audit, const AuditFace& face) {
  return modes_unfit_because(lattice, audit.shell, face).empty() &&
         !(face.is_uniform && tapered_plane_wave_kind(lattice, face.side).is_exact);
}

// Distance that a wave travels along the normal from plane 0 to the outer wall [m].
double depth_m(const Lattice& lattice, const AuditFace& face) {
  const MeshLines& lines = lattice.along(axis_of(face.side));
  const double wall_m = is_high(face.side) ? lines.node_m(lines.cells()) : lines.node_m(0);
  return std::abs(wall_m - lines.node_m(plane_zero(lattice, face)));
}

void add_split(FaceReading& reading, const Lattice& lattice, const AuditFace& face, std::size_t f,
               const FaceMedium& medium, const WaveBasis& basis, const FaceTheory& theory, int angle_bins) {
  const FaceSplit split = split_planes(face_planes(lattice, face, f), face.side,
                                       cell_outside_m(lattice, face, 0), medium, basis, angle_bins, theory);
  SplitPower all = split.totals[0], near;
  all += split.totals[1];
  for (int bin = 0; bin < angle_bins; ++bin)
    if (90.0 * (bin + 1) <= near_normal_deg * angle_bins)
      for (const auto& bins : split.bins) near += bins[static_cast<std::size_t>(bin)];
  reading.total = angle_sum(all, all.outgoing);
  reading.near_normal = angle_sum(near, all.outgoing);
  if (split.whole) reading.whole = whole_reading(*split.whole);
  double tapered_width_m = infinity;
  for (double width_m : basis.tapered_width_m)
    if (width_m > 0.0) tapered_width_m = std::min(tapered_width_m, width_m);
  for (Polarisation pol : both_polarisations) {
    const SplitPower& total = split.totals[index_of(pol)];
    reading.by_polarisation[index_of(pol)] = reflection_of(total.outgoing, total.returned, total.floor);
  }
  for (int bin = 0; bin < angle_bins; ++bin) {
    AngleRow row;
    row.lo_deg = 90.0 * bin / angle_bins;
    row.hi_deg = 90.0 * (bin + 1) / angle_bins;
    const double middle_rad = pi / 360.0 * (row.lo_deg + row.hi_deg);
    row.walk_off = 2.0 * depth_m(lattice, face) * std::tan(middle_rad) > 0.5 * tapered_width_m;
    if (theory.reflection) {
      const double k_t = medium.w_per_m() * std::sin(middle_rad);
      row.infinite_face_db = db_of_field(std::abs(theory.reflection(medium.w2_per_m2 - k_t * k_t)));
    }
    for (Polarisation pol : both_polarisations)
      row.readings[index_of(pol)] =
          reading_of(split.bins[index_of(pol)][static_cast<std::size_t>(bin)], all.outgoing);
    reading.rows.push_back(row);
  }
}

// All of a face that does not depend on frequency, with room for the readings.
FaceReport face_frame(const AuditRecord& audit, const Lattice& lattice, const AuditFace& face,
                      const std::vector<std::size_t>& frequencies) {
  FaceReport report;
  report.side = face.side;
  report.not_split_because = no_split_because(lattice, audit, face);
  report.permittivity_rel = face.permittivity_rel;
  report.permeability_rel = face.permeability_rel;
  report.conductivity_s_per_m = face.conductivity_s_per_m;
  report.kind = audit.shell[static_cast<std::size_t>(index_of(face.side))].kind;
  report.is_layered = !face.is_uniform && face.is_layered;
  report.goes_on_to_wall = face.goes_on_to_wall;
  report.shell_cells = lattice.shell(face.side);
  report.plane_m = lattice.along(axis_of(face.side)).node_m(plane_zero(lattice, face));
  report.clear_area_m2 = clear_area_m2(lattice, face.side);
  for (std::size_t f : frequencies) {
    report.readings.emplace_back();
    report.readings.back().frequency_hz = audit.frequencies_hz.at(f);
  }
  if (report.not_split_because.empty() && !frequencies.empty()) {
    if (uses_modes(lattice, audit, face)) {
      report.basis = "the lattice's own modes of the whole cross-section";
      report.basis_is_exact = report.basis_is_modal = true;
    } else {
      const BasisKind kind = tapered_plane_wave_kind(lattice, face.side);
      report.basis = kind.name;
      report.basis_is_exact = kind.is_exact;
      if (!kind.is_exact) report.not_separable_because = modes_unfit_because(lattice, audit.shell, face);
    }
  }
  return report;
}

// The medium in which a face's angles are read.
FaceMedium reading_medium(const AuditFace& face, IndexRange window_along_z, double frequency_hz,
                          double dt_s) {
  if (face.is_uniform || !face.is_layered)
    return face_medium(face.permittivity_rel, face.permeability_rel, face.conductivity_s_per_m, frequency_hz,
                       dt_s, face.magnetic_conductivity_ohm_per_m);
  const LayeredProfile& p = face.profile;
  const auto at = static_cast<std::size_t>(window_along_z.begin);
  return face_medium(p.permittivity_rel_half.at(at), p.permeability_rel_half.at(at),
                     p.conductivity_s_per_m_half.at(at), frequency_hz, dt_s,
                     p.magnetic_conductivity_ohm_per_m_half.at(at));
}

void fill_reading(FaceReading& reading, const AuditRecord& audit, const Lattice& lattice,
                  const AuditFace& face, std::size_t f, const FaceReport& frame,
                  const CrossSectionModes& modes, int angle_bins) {
  reading.net = net_power(lattice, face, f);
  reading.incident_w_s2 = incident_power_w_s2(lattice, audit, face, f);
  if (!frame.not_split_because.empty()) return;
  const IndexRange window = reading_cells(lattice, face, Axis::z);
  const FaceMedium medium = reading_medium(face, window, reading.frequency_hz, lattice.dt_s);
  const WaveBasis basis = frame.basis_is_modal ? modal_basis(lattice, face, modes, medium, window)
                                               : tapered_plane_waves(lattice, face.side, medium);
  const Face& layer = audit.shell[static_cast<std::size_t>(index_of(face.side))];
  add_split(reading, lattice, face, f, medium, basis, face_theory(lattice, layer, face, reading.frequency_hz),
            angle_bins);
}

/// Runs jobs 0 .. n - 1 on all threads. One job is computed by one thread from first to last, so that the
/// number of threads changes no digit.
template <class Job>
void in_parallel(int n, const Job& job) {
  std::exception_ptr failure;
#pragma omp parallel for schedule(dynamic)
  for (int i = 0; i < n; ++i) {
    try {
      job(i);
    } catch (...) {
#pragma omp critical(audit_report_failure)
      failure = std::current_exception();
    }
  }
  if (failure) std::rethrow_exception(failure);
}

CrossSectionModes cross_section_modes(const AuditRecord& audit, const Lattice& lattice,
                                      const std::vector<const AuditFace*>& faces, double frequency_hz) {
  std::array<bool, 3> nodes{}, halves{};
  const LayeredProfile* profile = nullptr;
  for (const AuditFace* face : faces) {
    for (Axis a : axes_of(face->side).tangential) {
      const auto at = static_cast<std::size_t>(index_of(a));
      if (!face->is_uniform && a == Axis::z)
        profile = &face->profile;
      else
        nodes[at] = halves[at] = true;
    }
  }
  CrossSectionModes modes;
  in_parallel(8, [&](int job) {
    const bool on_halves = job % 2 == 1;
    const auto at = static_cast<std::size_t>(job / 2);
    const Axis a = at < 3 ? static_cast<Axis>(at) : Axis::z;
    if (at < 3 ? !(on_halves ? halves : nodes)[at] : profile == nullptr) return;
    const AxisDifferences d = axis_differences(lattice, audit.shell, a, frequency_hz);
    if (at < 3)
      (on_halves ? modes.halves : modes.nodes)[at] = on_halves ? half_modes(d) : node_modes(d);
    else if (on_halves)
      modes.layered_ez = layered_ez_modes(d, *profile, frequency_hz, lattice.dt_s);
    else
      modes.layered_hz = layered_hz_modes(d, *profile, frequency_hz, lattice.dt_s);
  });
  return modes;
}

}  // namespace

Reflection reflection_of(double outgoing, double returned, double floor) {
  Reflection reading;
  if (!(outgoing > 0.0)) return reading;
  const double r = std::sqrt(returned / outgoing), f = std::sqrt(floor / outgoing);
  reading.value_db = db_of_field(r);
  reading.high_db = db_of_field(r + f);
  reading.floor_db = db_of_field(f);
  const bool is_clear = f <= 0.5 * r;
  reading.low_db = is_clear ? db_of_field(r - f) : -infinity;
  reading.kind = is_clear      ? Reflection::Kind::value
                 : r + f < 1.0 ? Reflection::Kind::bound
                               : Reflection::Kind::no_reading;
  return reading;
}

AuditReport audit_report(const AuditRecord& audit, const Lattice& lattice, const ReportChoice& choice) {
  std::vector<std::size_t> frequencies = choice.frequencies;
  if (frequencies.empty()) {
    frequencies.resize(audit.frequencies_hz.size());
    std::iota(frequencies.begin(), frequencies.end(), std::size_t{0});
  }
  for (Axis a : all_axes)
    if (lattice.clear_cells(a).size() < 1)
      throw std::invalid_argument("the lattice has no clear cells between its shells");
  AuditReport report;
  std::vector<const AuditFace*> faces;
  for (const AuditFace& face : audit.faces) {
    const bool wanted = choice.faces.empty() ||
                        std::find(choice.faces.begin(), choice.faces.end(), face.side) != choice.faces.end();
    if (!wanted) continue;
    faces.push_back(&face);
    report.faces.push_back(face_frame(audit, lattice, face, frequencies));
  }
  std::vector<const AuditFace*> modal;
  for (std::size_t n = 0; n < faces.size(); ++n)
    if (report.faces[n].basis_is_modal) modal.push_back(faces[n]);
  // Frequency by frequency: the modes of many would not fit into memory together.
  for (std::size_t m = 0; m < frequencies.size(); ++m) {
    const CrossSectionModes modes =
        cross_section_modes(audit, lattice, modal, audit.frequencies_hz.at(frequencies[m]));
    in_parallel(static_cast<int>(faces.size()), [&](int job) {
      const auto n = static_cast<std::size_t>(job);
      fill_reading(report.faces[n].readings[m], audit, lattice, *faces[n], frequencies[m], report.faces[n],
                   modes, choice.angle_bins);
    });
  }
  return report;
}

const AngleSum& sum_over(const FaceReading& reading, AngleRange range) {
  return range == AngleRange::all ? reading.total : reading.near_normal;
}

FaceVerdict verdict_of(const FaceReport& face, const std::optional<double>& goal_db) {
  FaceVerdict verdict;
  bool any = false, all_known = true;
  double worst_db = -infinity, unexpected_db = -infinity;
  verdict.as_designed = true;
  for (const FaceReading& reading : face.readings) {
    if (!reading.whole && !(reading.total.outgoing_w_s2 > 0.0)) continue;
    const Reflection& r = reading.whole ? reading.whole->reflection : reading.total.reflection;
    any = true;
    const bool is_value = r.kind == Reflection::Kind::value;
    const double level_db = is_value ? r.value_db : r.high_db;
    worst_db = std::max(worst_db, level_db);
    if (goal_db && !is_value && level_db > *goal_db) all_known = false;
    if (goal_db && is_value && level_db > *goal_db) verdict.misses_goal = true;
    if (!reading.whole || !reading.whole->closure_db) {
      verdict.as_designed.reset();
      continue;
    }
    const double closure_db = *reading.whole->closure_db;
    unexpected_db = std::max({unexpected_db, closure_db, r.floor_db});
    const bool is_real = closure_db > r.floor_db + closure_margin_db && closure_db > r.value_db - 20.0;
    if (is_real && verdict.as_designed) verdict.as_designed = false;
  }
  if (!any) return {};
  verdict.worst_db = worst_db;
  if (std::isfinite(unexpected_db)) verdict.unexpected_db = unexpected_db;
  if (goal_db) verdict.holds_goal = !verdict.misses_goal && all_known;
  return verdict;
}

const FaceReading* worst_reading(const FaceReport& face, AngleRange range) {
  const auto level_db = [range](const FaceReading& reading) {
    const Reflection& r = range == AngleRange::all && reading.whole ? reading.whole->reflection
                                                                    : sum_over(reading, range).reflection;
    return r.kind == Reflection::Kind::value ? r.value_db : r.high_db;
  };
  const FaceReading* worst = nullptr;
  for (const FaceReading& reading : face.readings) {
    const AngleSum& sum = sum_over(reading, range);
    if (reading.rows.empty() || !(sum.outgoing_w_s2 > 0.0) || sum.not_illuminated) continue;
    if (worst == nullptr || level_db(reading) > level_db(*worst)) worst = &reading;
  }
  return worst;
}

}  // namespace wanewall
