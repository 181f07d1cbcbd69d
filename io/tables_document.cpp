#include "io/tables_document.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <optional>

#include "io/quantity.hpp"
#include "postproc/audit_tables.hpp"
#include "postproc/point_tables.hpp"

namespace wanewall {
namespace {

std::string frequency_text(double hz) {
  return format_quantity(hz, Family::frequency, 4);
}

// A title may hold a line end, which would end the heading.
std::string one_line(std::string text) {
  std::replace_if(
      text.begin(), text.end(), [](char c) { return c == '\n' || c == '\r'; }, ' ');
  return text;
}

std::string provenance_text(const Record& record) {
  const Provenance& by = record.provenance;
  const double run_ns = time_of_e_s(record.result.steps, record.lattice.dt_s) * 1e9;
  std::string text = fmt::format(
      "- band {} to {}; {} steps of {} ({:.4g} ns), Courant number {:.4f}, {} precision\n",
      frequency_text(record.band_lo_hz), frequency_text(record.band_hi_hz), record.result.steps,
      format_quantity(record.lattice.dt_s, Family::time, 5), run_ns, record.lattice.courant_number(),
      record.precision == Precision::single_precision ? "single" : "double");
  const Index3 n = record.lattice.cells();
  text += fmt::format("- {} x {} x {} cells, shell included; the run {}\n", n[0], n[1], n[2],
                      name_of(record.result.reason));
  text += fmt::format("- computed by wanewall {} ({}), {}; tables by wanewall {}\n", by.program_version,
                      by.build_type, by.ended_utc, WANEWALL_VERSION);
  return text;
}

constexpr const char* method_of_power = R"(## How to read the shell tables

- Powers are 1/2 Re(E x H*) of Fourier sums in W s^2 = J/Hz, outwards through the clear cross-section on the audit
  plane, two cells inside the shell. Four times that is the energy per hertz. `net` is the direct sum over the lattice
  and holds for any media.
)";

constexpr const char* method_of_split =
    R"(- `outgoing` and `returned` are split from fields on two adjacent planes, wave by wave, with the lattice's own
  wavenumbers. R is returned over outgoing. `outgoing share` is a part of the face's outgoing power.
- `floor` is what R would read by error alone, from a third plane of the same run, with a margin of 6 dB. The
  range that it leaves open around R, 20 log(r - f) to 20 log(r + f), is in the CSV tables.
- `< x (floor)`: the floor is within 6 dB of the reading or above it, so only the bound x is known. `no reading`: not
  even a bound below 0 dB.
- `expected` is what the layer that ran should return by its theory on the lattice, wave by wave and through the same
  window; `excess` is R minus that. `R infinite face` is the theory at the bin's middle: a face of finite size returns
  less at large angles, because the wave comes back beside the window.
- `not illuminated`: outgoing share below -20 dB, so that skirts of other angles are read.
- `walk-off`: a wave at that angle comes back more than half the clear width to the side, or ends in a side shell. Less
  returns than an infinite face would reflect.
- TE has E along the face, TM has H along it. At exactly normal incidence TM holds E along the first tangential axis
  (in the order x, y, z) and TE along the second.
)";

constexpr const char* method_of_modes =
    R"(- Split by the lattice's own modes, side shells included: R, `expected` and `floor` of a face as a whole are ratios
  of field norms over the whole plane, no window. `closure` is the norm of what came back and was not expected,
  relative to what went out: as low as the floor when the shell is what it should be. Angles are read under one Hann
  window over the clear part; in layered ground over the deepest layer.
)";

constexpr const char* method_of_tapers =
    R"(- Where the modes are not known and the face is not periodic, the clear part is read under tapers: `outgoing` and
  `returned` take its middle for all of it, and the floor rises towards grazing. For the exact lattice field of a
  dipole two wavelengths before a face six wavelengths wide it is -57, -55, -47, -38, -18 dB in the bins at 5, 15, 25,
  35, 45 degrees, with no reading beyond. Narrow faces do worse, wide ones better. To check a better shell than the
  floor shows, compare with a run whose face is much thicker.
)";

constexpr const char* method_in_conductors =
    R"(- In a conducting medium the outgoing and the returned wave also exchange power, so `net` is not their difference.
)";

std::string method_text(const AuditReport& report) {
  bool any_split = false, any_taper = false, any_modes = false, any_lossy = false;
  for (const FaceReport& face : report.faces) {
    if (!face.not_split_because.empty()) continue;
    any_split = true;
    any_taper = any_taper || !face.basis_is_exact;
    any_modes = any_modes || face.basis_is_modal;
    any_lossy = any_lossy || face.conductivity_s_per_m > 0.0;
  }
  std::string text = method_of_power;
  if (any_split) text += method_of_split;
  if (any_modes) text += method_of_modes;
  if (any_taper) text += method_of_tapers;
  if (any_lossy) text += method_in_conductors;
  return text + "\n";
}

std::string face_heading(const Record& record, const FaceReport& face) {
  const FaceKind kind = record.result.audit.shell[static_cast<std::size_t>(index_of(face.side))].kind;
  std::string text = fmt::format("## Face {} ({}", name_of(face.side), name_of(kind));
  if (face.shell_cells > 0) text += fmt::format(", {} cells", face.shell_cells);
  text += ")\n\n";
  text += fmt::format("Audit plane at {} = {}, clear area {:.4g} m^2", name_of(axis_of(face.side)),
                      format_quantity(face.plane_m, Family::length, 6), face.clear_area_m2);
  if (!face.not_split_because.empty()) return text + ". Net power only: " + face.not_split_because + ".\n\n";
  text += face.is_layered ? ", media layered along z"
                          : fmt::format(", relative permittivity {:.4g}, conductivity {:.4g} S/m",
                                        face.permittivity_rel, face.conductivity_s_per_m);
  text += fmt::format(". Split in {}.", face.basis);
  if (!face.not_separable_because.empty())
    text += fmt::format(" The cross-section has no modes of its own: {}.", face.not_separable_because);
  if (!face.goes_on_to_wall)
    text +=
        " Inside this face's shell lies something else than at its plane; `expected` knows nothing of it.";
  return text + "\n\n";
}

std::string face_text(const Record& record, const FaceReport& face) {
  std::string text = face_heading(record, face) + to_markdown(power_table(face)) + "\n";
  if (!has_angles(face)) return text;
  for (const FaceReading& reading : face.readings)
    text += fmt::format("{}, face {}:\n\n", frequency_text(reading.frequency_hz), name_of(face.side)) +
            to_markdown(angle_table(reading)) + "\n";
  return text;
}

std::string energy_text(const RunResult& result) {
  const std::vector<double>& joule = result.energy.joule;
  if (joule.empty()) return "";
  const double peak = *std::max_element(joule.begin(), joule.end());
  if (!(peak > 0.0) || !(joule.back() > 0.0)) return "";
  return fmt::format(" The field energy had fallen by {:.0f} dB when the run ended.",
                     -10.0 * std::log10(joule.back() / peak));
}

// The floor of an exact basis shows what the end of the record left; under a taper the taper hides it.
// Single precision ends 20 dB earlier.
std::string warnings_text(const Record& record, const AuditReport& report) {
  const bool single = record.precision == Precision::single_precision;
  std::string text;
  for (const FaceReport& face : report.faces) {
    if (!face.basis_is_exact) continue;
    const double limit_db = !face.basis_is_modal ? -60.0
                            : single             ? floor_warning_db + 20.0
                                                 : floor_warning_db;
    const FaceReading* worst = nullptr;
    const auto floor_db = [](const FaceReading& reading) {
      return reading.whole ? reading.whole->reflection.floor_db : reading.total.reflection.floor_db;
    };
    for (const FaceReading& reading : face.readings) {
      if (!reading.whole && !(reading.total.outgoing_w_s2 > 0.0)) continue;
      if (floor_db(reading) > limit_db && (worst == nullptr || floor_db(reading) > floor_db(*worst)))
        worst = &reading;
    }
    if (worst == nullptr) continue;
    text += fmt::format(
        "**Caution:** face {}, {}: the third plane's floor is {:.1f} dB. The record may be too short, its "
        "samples "
        "too far apart, or something crosses the plane.{}\n\n",
        name_of(face.side), frequency_text(worst->frequency_hz), floor_db(*worst),
        energy_text(record.result));
  }
  return text;
}

// What the scene asked of its shell.
std::optional<double> goal_db_of(const Record& record) {
  for (const UsedValue& used : record.used) {
    if (used.path != "shell.goal") continue;
    const ParsedQuantity goal = parse_quantity(used.value, Family::level);
    if (goal) return goal.value;
  }
  return std::nullopt;
}

std::string points_text(const Record& record, const std::vector<double>& frequencies_hz) {
  const std::vector<PointSeries>& points = record.result.points;
  if (points.empty()) return {};
  std::string text = "## Points\n\nLargest values in time, " +
                     std::string("interpolated linearly to the point:\n\n") +
                     to_markdown(peak_table(points, record.lattice.dt_s)) + "\n";
  for (const PointSeries& point : points)
    text += fmt::format("Magnitude of the spectrum dt sum f(t) exp(-j omega t) at {}:\n\n",
                        one_line(point.name)) +
            to_markdown(spectrum_table(point, record.lattice.dt_s, frequencies_hz)) + "\n";
  return text;
}

}  // namespace

std::vector<double> point_frequencies_hz(const Record& record, const ReportChoice& choice) {
  const std::vector<double>& audited = record.result.audit.frequencies_hz;
  std::vector<double> frequencies_hz;
  if (!choice.frequencies.empty()) {
    for (std::size_t f : choice.frequencies) frequencies_hz.push_back(audited.at(f));
  } else if (!audited.empty()) {
    frequencies_hz = audited;
  } else {
    constexpr int n = 9;
    for (int i = 0; i < n; ++i)
      frequencies_hz.push_back(record.band_lo_hz + (record.band_hi_hz - record.band_lo_hz) * i / (n - 1));
  }
  return frequencies_hz;
}

std::string tables_markdown(const Record& record, const AuditReport& report, const ReportChoice& choice) {
  std::string text = fmt::format("# Tables: {}\n\n", one_line(record.title));
  text += provenance_text(record) + "\n";
  if (record.result.audit.faces.empty()) {
    text +=
        "This record holds no shell audit, so there are no tables of power and reflection. A scene asks for "
        "it "
        "with\n`record: {shell_audit: {frequencies: 9}}`.\n\n";
  } else {
    text += "## Shell at a glance\n\n" + to_markdown(overview_table(report, goal_db_of(record))) + "\n" +
            warnings_text(record, report) + method_text(report);
    for (const FaceReport& face : report.faces) text += face_text(record, face);
  }
  if (record.result.points.empty() && record.result.audit.faces.empty())
    text += "No points were recorded either.\n";
  return text + points_text(record, point_frequencies_hz(record, choice));
}

std::vector<NamedText> tables_csv(const Record& record, const AuditReport& report,
                                  const ReportChoice& choice) {
  std::vector<NamedText> files;
  if (!report.faces.empty()) {
    files.push_back({"reflection.csv", to_csv(reflection_rows(report))});
    files.push_back({"power.csv", to_csv(power_rows(report))});
  }
  if (!record.result.points.empty()) {
    const double dt_s = record.lattice.dt_s;
    files.push_back({"points.csv", to_csv(peak_table(record.result.points, dt_s))});
    files.push_back({"point_spectra.csv", to_csv(spectrum_rows(record.result.points, dt_s,
                                                               point_frequencies_hz(record, choice)))});
  }
  return files;
}

}  // namespace wanewall
