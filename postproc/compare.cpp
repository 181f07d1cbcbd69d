#include "postproc/compare.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <limits>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "postproc/point_tables.hpp"

namespace wanewall {
namespace {

/// Positions that differ by less than this part of a cell are the same.
constexpr double same_place = 1e-6;
constexpr double no_level = -std::numeric_limits<double>::infinity();

constexpr double beyond_levels = std::numeric_limits<double>::infinity();

double level_db(double part, double whole) {
  if (part == 0.0) return no_level;
  return std::isfinite(part) && whole > 0.0 ? 20.0 * std::log10(part / whole) : beyond_levels;
}

double smallest_cell_m(const Lattice& lattice) {
  double least = lattice.lines[0].smallest_cell_m();
  for (const MeshLines& lines : lattice.lines) least = std::min(least, lines.smallest_cell_m());
  return least;
}

std::size_t length_of(const PointSeries& point) {
  const std::size_t n = point.values[0].size();
  for (const auto& values : point.values)
    if (values.size() != n) throw std::invalid_argument("the components of a point differ in length");
  return n;
}

FieldError field_error(const PointSeries& reference, const PointSeries& run, bool electric, std::size_t n,
                       double dt_s, const std::vector<double>& frequencies_hz) {
  const std::size_t first = electric ? 0 : 3;
  FieldError error;
  error.change.reserve(n);
  double change_squares = 0.0, reference_squares = 0.0;
  PointSeries difference;
  for (std::size_t c = first; c < first + 3; ++c) difference.values[c].resize(n);
  for (std::size_t t = 0; t < n; ++t) {
    double change2 = 0.0, reference2 = 0.0;
    for (std::size_t c = first; c < first + 3; ++c) {
      const double f_ref = reference.values[c][t], f = run.values[c][t];
      difference.values[c][t] = f - f_ref;
      change2 += (f - f_ref) * (f - f_ref);
      reference2 += f_ref * f_ref;
    }
    change_squares += change2;
    reference_squares += reference2;
    error.reference_peak = std::max(error.reference_peak, std::sqrt(reference2));
    error.change.push_back(std::sqrt(change2));
    const bool is_finite = std::isfinite(error.change.back());
    if (std::isfinite(error.largest_change) && (!is_finite || error.change.back() > error.largest_change)) {
      error.largest_change = error.change.back();
      const auto step = static_cast<long>(t);
      error.largest_at_s = electric ? time_of_e_s(step, dt_s) : time_of_h_s(step, dt_s);
    }
  }
  error.peak_db = level_db(error.largest_change, error.reference_peak);
  error.rms_db = level_db(std::sqrt(change_squares), std::sqrt(reference_squares));

  PointSeries window = reference;  // the same samples for both, so that the two transforms can be compared
  for (std::size_t c = first; c < first + 3; ++c) window.values[c].resize(n);
  for (const double frequency_hz : frequencies_hz) {
    double change2 = 0.0, reference2 = 0.0;
    for (std::size_t c = first; c < first + 3; ++c) {
      const auto component = static_cast<Component>(c);
      change2 += std::norm(spectrum_at(difference, component, dt_s, frequency_hz));
      reference2 += std::norm(spectrum_at(window, component, dt_s, frequency_hz));
    }
    error.spectrum_db.push_back(level_db(std::sqrt(change2), std::sqrt(reference2)));
  }
  return error;
}

const PointSeries* find_point(const RunResult& result, const std::string& name) {
  for (const PointSeries& point : result.points)
    if (point.name == name) return &point;
  return nullptr;
}

bool is_at(const Vec3& a_m, const Vec3& b_m, double tolerance_m) {
  for (std::size_t i = 0; i < 3; ++i)
    if (!(std::abs(a_m[i] - b_m[i]) <= tolerance_m)) return false;
  return true;
}

/// Whether the mesh lines that a point's values are taken from are the same in both: those within a cell and
/// a half of it.
bool same_lines_around(const Lattice& a, const Lattice& b, const Vec3& point_m, double tolerance_m) {
  for (const Axis axis : all_axes) {
    const MeshLines &lines = a.along(axis), &others = b.along(axis);
    const double at_m = point_m[static_cast<std::size_t>(index_of(axis))];
    for (const double node_m : lines.all_m()) {
      const bool is_near = std::abs(node_m - at_m) < 1.5 * lines.largest_cell_m();
      const bool is_in_both = others.all_m().front() <= node_m && node_m <= others.all_m().back();
      if (is_near && is_in_both &&
          !(std::abs(others.node_m(others.nearest_node(node_m)) - node_m) <= tolerance_m))
        return false;
    }
  }
  return true;
}

void compare_points(const Compared& reference, const Compared& run, Comparison& comparison) {
  const double tolerance_m = same_place * smallest_cell_m(reference.lattice);
  for (const PointSeries& wanted : reference.result.points) {
    const PointSeries* point = find_point(run.result, wanted.name);
    if (point == nullptr) {
      comparison.notes.push_back(fmt::format("point \"{}\" is only in the reference", wanted.name));
      continue;
    }
    if (!is_at(wanted.position_m, point->position_m, tolerance_m)) {
      comparison.notes.push_back(fmt::format("point \"{}\" is at different places in the two", wanted.name));
      continue;
    }
    if (!same_lines_around(reference.lattice, run.lattice, wanted.position_m, tolerance_m))
      comparison.notes.push_back(fmt::format(
          "the mesh lines around point \"{}\" differ: its error holds that of the mesh", wanted.name));
    const std::size_t here = length_of(*point), there = length_of(wanted), n = std::min(here, there);
    if (here != there)
      comparison.notes.push_back(
          fmt::format("point \"{}\": {} samples against {} in the reference; the first "
                      "{} are compared, also for the spectra",
                      wanted.name, here, there, n));
    comparison.steps = std::max(comparison.steps, n);
    const std::vector<double>& f = comparison.frequencies_hz;
    comparison.points.push_back({wanted.name, wanted.position_m,
                                 field_error(wanted, *point, true, n, comparison.dt_s, f),
                                 field_error(wanted, *point, false, n, comparison.dt_s, f)});
  }
  for (const PointSeries& point : run.result.points)
    if (find_point(reference.result, point.name) == nullptr)
      comparison.notes.push_back(fmt::format("point \"{}\" is not in the reference", point.name));
}

// ---- audit planes ----

/// Stored indices along one axis of a component that lie in both clear volumes: `count` of them, from
/// `in_reference` and `in_run` on.
struct SharedRange {
  int in_reference = 0, in_run = 0, count = 0;
};

SharedRange shared_range(const Lattice& reference, const Lattice& run, Component c, Axis axis,
                         double tolerance_m) {
  const IndexRange a = reference.clear(c, axis), b = run.clear(c, axis);
  int i = a.begin, j = b.begin;
  while (i < a.end && j < b.end) {  // positions increase along both
    const double apart_m = reference.position_m(c, axis, i) - run.position_m(c, axis, j);
    if (std::abs(apart_m) <= tolerance_m) break;
    (apart_m < 0.0 ? i : j) += 1;
  }
  SharedRange shared{i, j, 0};
  while (i < a.end && j < b.end &&
         std::abs(reference.position_m(c, axis, i) - run.position_m(c, axis, j)) <= tolerance_m) {
    ++shared.count;
    ++i;
    ++j;
  }
  return shared;
}

std::array<Axis, 2> across(Axis normal) {
  return normal == Axis::x   ? std::array{Axis::y, Axis::z}
         : normal == Axis::y ? std::array{Axis::x, Axis::z}
                             : std::array{Axis::x, Axis::y};
}

const AuditPlane* find_same(const AuditFace& face, const AuditPlane& wanted, double tolerance_m) {
  for (const AuditPlane& plane : face.planes)
    if (plane.component == wanted.component && std::abs(plane.normal_m - wanted.normal_m) <= tolerance_m)
      return &plane;
  return nullptr;
}

/// Sums of squares of one field, E or H, per frequency.
struct Squares {
  std::vector<double> change, reference;
  double positions = 0.0;
};

void add_plane(const Compared& reference, const Compared& run, Axis normal, const AuditPlane& wanted,
               const AuditPlane& plane, double tolerance_m, Squares& squares) {
  const std::array<Axis, 2> t = across(normal);
  const SharedRange first = shared_range(reference.lattice, run.lattice, wanted.component, t[0], tolerance_m);
  const SharedRange second =
      shared_range(reference.lattice, run.lattice, wanted.component, t[1], tolerance_m);
  const auto sum_of = [](const AuditPlane& p, std::size_t f, int i, int j) {
    const std::size_t rows = static_cast<std::size_t>(p.shape[0]),
                      columns = static_cast<std::size_t>(p.shape[1]);
    return std::complex<double>(
        p.sums.at((f * rows + static_cast<std::size_t>(i)) * columns + static_cast<std::size_t>(j)));
  };
  for (std::size_t f = 0; f < squares.change.size(); ++f) {
    for (int i = 0; i < first.count; ++i) {
      for (int j = 0; j < second.count; ++j) {
        const auto a = sum_of(wanted, f, first.in_reference + i, second.in_reference + j);
        const auto b = sum_of(plane, f, first.in_run + i, second.in_run + j);
        squares.change[f] += std::norm(b - a);
        squares.reference[f] += std::norm(a);
      }
    }
  }
  squares.positions += static_cast<double>(first.count) * second.count;
}

void finish(const Squares& squares, std::vector<double>& change, std::vector<double>& reference,
            std::vector<double>& db) {
  const double positions = std::max(squares.positions, 1.0);
  for (std::size_t f = 0; f < squares.change.size(); ++f) {
    change.push_back(std::sqrt(squares.change[f] / positions));
    reference.push_back(std::sqrt(squares.reference[f] / positions));
    db.push_back(level_db(change.back(), reference.back()));
  }
}

bool same_frequencies(const std::vector<double>& a_hz, const std::vector<double>& b_hz) {
  return std::equal(a_hz.begin(), a_hz.end(), b_hz.begin(), b_hz.end(), [](double a, double b) {
    return std::abs(a - b) <= 1e-9 * std::max(std::abs(a), std::abs(b));
  });
}

void compare_faces(const Compared& reference, const Compared& run, Comparison& comparison) {
  const AuditRecord &wanted = reference.result.audit, &audit = run.result.audit;
  if (wanted.faces.empty() || audit.faces.empty()) return;
  if (!same_frequencies(wanted.frequencies_hz, audit.frequencies_hz)) {
    comparison.notes.push_back("the shell audits have different frequencies and are not compared");
    return;
  }
  const double tolerance_m = same_place * smallest_cell_m(reference.lattice);
  const std::size_t n = wanted.frequencies_hz.size();
  for (const AuditFace& there : wanted.faces) {
    const auto here = std::find_if(audit.faces.begin(), audit.faces.end(),
                                   [&](const AuditFace& face) { return face.side == there.side; });
    if (here == audit.faces.end()) continue;
    Squares e{std::vector<double>(n), std::vector<double>(n), 0.0}, h = e;
    for (const AuditPlane& plane : there.planes) {
      const AuditPlane* same = find_same(*here, plane, tolerance_m);
      if (same != nullptr)
        add_plane(reference, run, axis_of(there.side), plane, *same, tolerance_m,
                  is_electric(plane.component) ? e : h);
    }
    if (e.positions + h.positions == 0.0) {
      comparison.notes.push_back(
          fmt::format("the audit planes of face {} lie at different places", name_of(there.side)));
      continue;
    }
    FaceError face;
    face.side = there.side;
    face.frequencies_hz = wanted.frequencies_hz;
    finish(e, face.e_change_v_s_per_m, face.e_reference_v_s_per_m, face.e_db);
    finish(h, face.h_change_a_s_per_m, face.h_reference_a_s_per_m, face.h_db);
    comparison.faces.push_back(std::move(face));
  }
}

Cell level_cell(double db) {
  if (std::isfinite(db)) return db;
  return std::string(db < 0.0 ? "equal" : "no level");
}

}  // namespace

Comparison compare(const Compared& reference, const Compared& run,
                   const std::vector<double>& frequencies_hz) {
  const double dt_s = reference.lattice.dt_s;
  if (!(std::abs(run.lattice.dt_s - dt_s) <= 1e-9 * dt_s))
    throw std::invalid_argument(fmt::format(
        "the time steps differ: {:.9g} s against {:.9g} s in the reference", run.lattice.dt_s, dt_s));
  Comparison comparison;
  comparison.dt_s = dt_s;
  comparison.frequencies_hz = frequencies_hz;
  compare_points(reference, run, comparison);
  compare_faces(reference, run, comparison);
  return comparison;
}

const PointError* worst_point(const Comparison& comparison) {
  const PointError* worst = nullptr;
  for (const PointError& point : comparison.points)
    if (worst == nullptr || point.e.peak_db > worst->e.peak_db) worst = &point;
  return worst;
}

double worst_peak_db(const Comparison& comparison) {
  double worst = no_level;
  for (const PointError& point : comparison.points)
    worst = std::max({worst, point.e.peak_db, point.h.peak_db});
  return worst;
}

double worst_in_band_db(const FieldError& error) {
  double worst = no_level;
  for (const double db : error.spectrum_db) worst = std::max(worst, db);
  return worst;
}

Table point_error_table(const Comparison& comparison) {
  Table table;
  table.columns = {{"point", ""},
                   {"field", ""},
                   {"reference peak", ""},
                   {"largest change", ""},
                   {"unit", ""},
                   {"at", "ns"},
                   {"peak error", "dB", NumberStyle::one_decimal},
                   {"rms error", "dB", NumberStyle::one_decimal},
                   {"worst in band", "dB", NumberStyle::one_decimal}};
  for (const PointError& point : comparison.points) {
    for (const bool electric : {true, false}) {
      const FieldError& error = electric ? point.e : point.h;
      table.rows.push_back({point.name, electric ? "E" : "H", error.reference_peak, error.largest_change,
                            electric ? "V/m" : "A/m", error.largest_at_s * 1e9, level_cell(error.peak_db),
                            level_cell(error.rms_db), level_cell(worst_in_band_db(error))});
    }
  }
  return table;
}

Table band_error_table(const Comparison& comparison) {
  Table table;
  table.columns = {{"frequency", "GHz"}};
  for (const PointError& point : comparison.points)
    for (const char* field : {"E", "H"})
      table.columns.push_back({fmt::format("{} {}", point.name, field), "dB", NumberStyle::one_decimal});
  for (std::size_t f = 0; f < comparison.frequencies_hz.size(); ++f) {
    std::vector<Cell> row{comparison.frequencies_hz[f] * 1e-9};
    for (const PointError& point : comparison.points)
      for (const FieldError* error : {&point.e, &point.h}) row.push_back(level_cell(error->spectrum_db[f]));
    table.rows.push_back(std::move(row));
  }
  return table;
}

Table face_error_table(const Comparison& comparison) {
  Table table;
  table.columns = {{"face", ""},
                   {"frequency", "GHz"},
                   {"E change", "dB", NumberStyle::one_decimal},
                   {"E change, rms", "V s/m"},
                   {"H change", "dB", NumberStyle::one_decimal},
                   {"H change, rms", "A s/m"}};
  for (const FaceError& face : comparison.faces)
    for (std::size_t f = 0; f < face.frequencies_hz.size(); ++f)
      table.rows.push_back({std::string(name_of(face.side)), face.frequencies_hz[f] * 1e-9,
                            level_cell(face.e_db[f]), face.e_change_v_s_per_m[f], level_cell(face.h_db[f]),
                            face.h_change_a_s_per_m[f]});
  return table;
}

Table comparison_rows(const std::string& record, const Comparison& comparison) {
  Table table;
  table.columns = {{"record", ""},
                   {"point or face", ""},
                   {"x", "m"},
                   {"y", "m"},
                   {"z", "m"},
                   {"field", ""},
                   {"reference peak", ""},
                   {"unit", ""},
                   {"largest change", ""},
                   {"at", "s"},
                   {"peak error", "dB"},
                   {"rms error", "dB"},
                   {"frequency", "Hz"},
                   {"error", "dB"}};
  const Cell nothing;
  for (const PointError& point : comparison.points) {
    for (const bool electric : {true, false}) {
      const FieldError& error = electric ? point.e : point.h;
      for (std::size_t f = 0; f < comparison.frequencies_hz.size(); ++f)
        table.rows.push_back({record, point.name, point.position_m[0], point.position_m[1],
                              point.position_m[2], electric ? "E" : "H", error.reference_peak,
                              electric ? "V/m" : "A/m", error.largest_change, error.largest_at_s,
                              level_cell(error.peak_db), level_cell(error.rms_db),
                              comparison.frequencies_hz[f], level_cell(error.spectrum_db[f])});
    }
  }
  for (const FaceError& face : comparison.faces)
    for (const bool electric : {true, false})
      for (std::size_t f = 0; f < face.frequencies_hz.size(); ++f)
        table.rows.push_back({record, std::string(name_of(face.side)), nothing, nothing, nothing,
                              electric ? "E" : "H", nothing, electric ? "V s/m" : "A s/m",
                              electric ? face.e_change_v_s_per_m[f] : face.h_change_a_s_per_m[f], nothing,
                              nothing, nothing, face.frequencies_hz[f],
                              level_cell(electric ? face.e_db[f] : face.h_db[f])});
  return table;
}

}  // namespace wanewall
