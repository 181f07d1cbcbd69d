#include "io/shell_document.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"
#include "io/quantity.hpp"

namespace wanewall {
namespace {

constexpr double degree = pi / 180.0;
constexpr int fewest_in_trade = 3, most_in_trade = 16;

std::string frequency_text(double hz) {
  return format_quantity(hz, Family::frequency, 4);
}

double cell_m(const Scene& scene, Side side) {
  return scene.problem.lattice.along(axis_of(side)).smallest_cell_m();
}

bool same_cell(const Scene& scene, Side a, Side b) {
  return std::abs(cell_m(scene, a) - cell_m(scene, b)) < 1e-9 * cell_m(scene, a);
}

std::string names(const std::vector<Side>& sides) {
  std::string text;
  for (Side side : sides) text += (text.empty() ? "" : " ") + std::string(name_of(side));
  return text;
}

std::string heading(const Scene& scene, const FacePrediction& p) {
  const Face& face = scene.problem.face(p.sides.front());
  const std::string what = face.kind == FaceKind::one_way
                               ? fmt::format("one_way, order {}", face.one_way_order)
                               : fmt::format("{}, {} cells", name_of(face.kind), face.cells());
  return fmt::format("{}: {}, in {}", names(p.sides), what,
                     scene.problem.media[static_cast<std::size_t>(p.medium)].name);
}

std::string list_text(const std::vector<double>& values, const char* unit) {
  std::string text;
  for (double v : values) text += fmt::format("{}{:.17g}{}", text.empty() ? "" : ", ", v, unit);
  return "[" + text + "]";
}

std::string yaml_of(const Face& face, const std::string& indent) {
  std::string text;
  const auto line = [&](const char* key, const std::string& value) {
    text += fmt::format("{}{}: {}\n", indent, key, value);
  };
  line("kind", std::string(name_of(face.kind)));
  switch (face.kind) {
    case FaceKind::moebius:
      line("sigma", list_text(face.moebius.sigma_s_per_m, " S/m"));
      line("kappa", list_text(face.moebius.kappa, ""));
      line("alpha", list_text(face.moebius.alpha_s_per_m, " S/m"));
      break;
    case FaceKind::cfs_pml:
    case FaceKind::matched_slab:
      line("sigma_e", list_text(face.layer.sigma_e_s_per_m, " S/m"));
      line("sigma_h", list_text(face.layer.sigma_h_s_per_m, " S/m"));
      if (face.kind == FaceKind::matched_slab) break;
      line("kappa_e", list_text(face.layer.kappa_e, ""));
      line("kappa_h", list_text(face.layer.kappa_h, ""));
      line("alpha_e", list_text(face.layer.alpha_e_s_per_m, " S/m"));
      line("alpha_h", list_text(face.layer.alpha_h_s_per_m, " S/m"));
      break;
    case FaceKind::one_way:
      line("order", fmt::format("{}", face.one_way_order));
      break;
    default:
      break;
  }
  return text;
}

/// Faces with a design on the same inputs, kind and cell.
std::vector<std::vector<Side>> alike_designs(const Scene& scene) {
  std::vector<std::vector<Side>> groups;
  for (Side side : all_sides) {
    const FaceDesign& design = scene.designs[static_cast<std::size_t>(index_of(side))];
    if (!design.inputs) continue;
    const auto same = [&](const std::vector<Side>& group) {
      const Side first = group.front();
      return as_designed(*scene.designs[static_cast<std::size_t>(index_of(first))].inputs) ==
                 as_designed(*design.inputs) &&
             scene.problem.face(first) == scene.problem.face(side) && same_cell(scene, first, side);
    };
    const auto found = std::find_if(groups.begin(), groups.end(), same);
    if (found == groups.end())
      groups.push_back({side});
    else
      found->push_back(side);
  }
  return groups;
}

/// The lowest goal that a mean meets.
double goal_met_db(double mean_db) {
  const double shallow_db = std::max(mean_db + design_margin_db(0.0), -100.0);
  const double deep_db = mean_db + design_margin_db(-300.0);
  return std::min(shallow_db, deep_db < -100.0 ? deep_db : shallow_db);
}

std::string trade_markdown(const Scene& scene, Side side) {
  const FaceDesign& design = scene.designs[static_cast<std::size_t>(index_of(side))];
  const Face& face = scene.problem.face(side);
  Table table;
  table.columns = {{"cells", "", NumberStyle::whole},
                   {"expected", "dB", NumberStyle::one_decimal},
                   {"goals met down to", "dB", NumberStyle::one_decimal},
                   {"worst point", "dB", NumberStyle::one_decimal},
                   {"textbook cfs_pml, order 3", "dB", NumberStyle::one_decimal}};
  const double d = cell_m(scene, side);
  for (int cells = fewest_in_trade; cells <= most_in_trade; ++cells) {
    const DesignFigures f = face.kind == FaceKind::moebius ? design_moebius(*design.inputs, cells, d).figures
                                                           : design_cfs_pml(*design.inputs, cells, d).figures;
    PolynomialGrading grading;
    grading.sigma_max_s_per_m = sigma_max_rule(grading.order, d, 1.0);
    table.rows.push_back({static_cast<double>(cells), f.mean_db, goal_met_db(f.mean_db), f.worst_db,
                          figures_of(polynomial_layer(grading, cells), *design.inputs, d).mean_db});
  }
  return to_markdown(table);
}

}  // namespace

std::vector<FacePrediction> predict_shell(const Scene& scene, const PredictionGrid& grid) {
  const Problem& problem = scene.problem;
  std::vector<FacePrediction> all;
  for (Side side : all_sides) {
    const Face& face = problem.face(side);
    if (!absorbs(face.kind)) continue;
    for (int medium : scene.surroundings.faces[static_cast<std::size_t>(index_of(side))].media) {
      const auto same = [&](const FacePrediction& p) {
        return p.medium == medium && problem.face(p.sides.front()) == face &&
               same_cell(scene, p.sides.front(), side);
      };
      const auto found = std::find_if(all.begin(), all.end(), same);
      if (found != all.end()) {
        found->sides.push_back(side);
        continue;
      }
      all.push_back({{side},
                     medium,
                     predict(face, problem.media[static_cast<std::size_t>(medium)], cell_m(scene, side),
                             problem.lattice.dt_s, grid)});
    }
  }
  return all;
}

std::string prediction_markdown(const Scene& scene, const std::vector<FacePrediction>& predictions,
                                double milliseconds_per_thousand) {
  std::string text = fmt::format(
      "# Predicted reflection of the shell\n\n- scene {}\n- Courant number {:.4f}\n- exact on the lattice; "
      "in "
      "brackets the continuum's value, which no lattice keeps\n- evanescent waves fall by exp(-decay) per "
      "cell "
      "towards the face\n- {:.3g} ms per thousand waves\n",
      scene.file, scene.problem.lattice.courant_number(), milliseconds_per_thousand);
  for (Side side : all_sides) {
    const FaceKind kind = scene.problem.face(side).kind;
    if (absorbs(kind)) continue;
    text += fmt::format("- {}: {}, {}\n", name_of(side), name_of(kind),
                        kind == FaceKind::electric_wall   ? "R = -1 for every wave"
                        : kind == FaceKind::magnetic_wall ? "R = +1 for every wave"
                                                          : "joined to the opposite face");
  }
  for (const FacePrediction& p : predictions) {
    for (const Polarisation polarisation : both_polarisations) {
      Table table;
      table.columns = {{"wave", ""}};
      for (const PredictedReflection& w : p.waves) {  // rows: waves, columns: frequencies
        if (w.polarisation != polarisation) continue;
        const std::string frequency = frequency_text(w.frequency_hz);
        if (table.columns.back().name != frequency) table.columns.push_back({frequency, "dB"});
        const std::string name =
            w.is_evanescent
                ? fmt::format("decay {:g}", w.angle_rad_or_decay_per_cell)
                : fmt::format("{:g} deg", std::round(w.angle_rad_or_decay_per_cell / degree * 1e6) / 1e6);
        const std::string value = fmt::format("{:.1f} ({:.1f})", w.lattice_db, w.continuum_db);
        const auto row = std::find_if(table.rows.begin(), table.rows.end(), [&](const std::vector<Cell>& r) {
          return std::get<std::string>(r[0]) == name;
        });
        if (row == table.rows.end())
          table.rows.push_back({name, value});
        else
          row->emplace_back(value);
      }
      if (table.rows.empty()) continue;
      const bool both = scene.problem.face(p.sides.front()).kind != FaceKind::matched_slab;
      text += fmt::format("\n## {}, {}\n\n{}", heading(scene, p),
                          both                               ? "both polarisations"
                          : polarisation == Polarisation::te ? "te"
                                                             : "tm",
                          to_markdown(table));
    }
  }
  return text;
}

Table prediction_table(const Scene& scene, const std::vector<FacePrediction>& predictions) {
  Table table;
  table.columns = {
      {"face", ""},        {"kind", ""},     {"medium", ""},      {"polarisation", ""},
      {"frequency", "Hz"}, {"angle", "deg"}, {"decay", "1/cell"}, {"reflection on the lattice", "dB"},
      {"continuum", "dB"}};
  for (const FacePrediction& p : predictions)
    for (Side side : p.sides)
      for (const PredictedReflection& w : p.waves) {
        const Face& face = scene.problem.face(side);
        const std::string polarisation = face.kind != FaceKind::matched_slab  ? "both"
                                         : w.polarisation == Polarisation::te ? "te"
                                                                              : "tm";
        table.rows.push_back(
            {std::string(name_of(side)), std::string(name_of(face.kind)),
             scene.problem.media[static_cast<std::size_t>(p.medium)].name, polarisation, w.frequency_hz,
             w.is_evanescent ? Cell{} : Cell{w.angle_rad_or_decay_per_cell / degree},
             w.is_evanescent ? Cell{w.angle_rad_or_decay_per_cell} : Cell{}, w.lattice_db, w.continuum_db});
      }
  return table;
}

LineChart prediction_chart(const Scene& scene, const std::vector<FacePrediction>& predictions) {
  LineChart chart;
  chart.x_label = "angle from the normal [deg]";
  chart.y_label = "reflection [dB]";
  chart.x_range = {0.0, 90.0};
  double lowest_db = -20.0;
  for (const FacePrediction& p : predictions) {
    if (p.waves.empty()) continue;
    const auto te_waves = std::count_if(p.waves.begin(), p.waves.end(), [](const PredictedReflection& w) {
      return w.polarisation == Polarisation::te;
    });
    const double frequency_hz = p.waves[static_cast<std::size_t>(te_waves / 2)].frequency_hz;
    chart.title = "Reflection of the shell at " + frequency_text(frequency_hz);
    for (const Polarisation polarisation : both_polarisations) {
      Curve exact{heading(scene, p), {}, {}};
      for (const PredictedReflection& w : p.waves) {
        if (w.is_evanescent || w.polarisation != polarisation || w.frequency_hz != frequency_hz) continue;
        exact.x.push_back(w.angle_rad_or_decay_per_cell / degree);
        exact.y.push_back(w.lattice_db);
        lowest_db = std::min(lowest_db, w.lattice_db);
      }
      if (exact.x.empty()) continue;
      if (scene.problem.face(p.sides.front()).kind == FaceKind::matched_slab)
        exact.label += polarisation == Polarisation::te ? ", te" : ", tm";
      Curve continuum{exact.label + ", continuum", exact.x, {}};
      for (const PredictedReflection& w : p.waves)
        if (!w.is_evanescent && w.polarisation == polarisation && w.frequency_hz == frequency_hz)
          continuum.y.push_back(w.continuum_db);
      chart.curves.push_back(std::move(exact));
      chart.curves.push_back(std::move(continuum));
    }
  }
  chart.y_range = {20.0 * std::floor((lowest_db - 10.0) / 20.0), 0.0};
  return chart;
}

std::string design_markdown(const Scene& scene, bool with_trade) {
  const Problem& problem = scene.problem;
  std::string text = fmt::format(
      "# Design of the shell\n\n- scene {}\n- diagonal of the clear volume {}\n- pulse up to {}{}\n- "
      "expected: the "
      "mean of w |R| over propagating, grazing and evanescent waves, w what a reflected near field weighs "
      "them with;\n  errors in time have been up to 10 dB above it, and 15 dB where it is below -100 dB, so "
      "a "
      "goal counts as met that far above it\n",
      scene.file,
      format_quantity(scene.design_overrides.diagonal_m.value_or(scene.surroundings.diagonal_m),
                      Family::length, 4),
      frequency_text(scene.design_overrides.top_frequency_hz.value_or(scene.surroundings.top_frequency_hz)),
      scene.surroundings.has_statics ? "; it has a mean, so statics may remain"
      : scene.surroundings.is_long   ? "; the run is long, so slow fields matter"
                                     : "");
  Table inputs;
  inputs.columns = {{"face", ""},
                    {"kind", ""},
                    {"cells", "", NumberStyle::whole},
                    {"clearance", "cells"},
                    {"nearest", ""},
                    {"media", ""},
                    {"index at the top", ""},
                    {"index at the bottom", ""},
                    {"wavelengths", "cells"},
                    {"expected", "dB", NumberStyle::one_decimal},
                    {"worst point", "dB", NumberStyle::one_decimal}};
  for (Side side : all_sides) {
    const auto s = static_cast<std::size_t>(index_of(side));
    const FaceDesign& design = scene.designs[s];
    const Face& face = problem.faces[s];
    std::string media;
    for (int m : scene.surroundings.faces[s].media)
      media += (media.empty() ? "" : " ") + problem.media[static_cast<std::size_t>(m)].name;
    if (!design.inputs) {
      inputs.rows.push_back({std::string(name_of(side)),
                             std::string(name_of(face.kind)),
                             static_cast<double>(face.cells()),
                             {},
                             {},
                             media,
                             {},
                             {},
                             {},
                             {},
                             {}});
      continue;
    }
    const auto& f = design.inputs->frequencies;
    inputs.rows.push_back(
        {std::string(name_of(side)), std::string(name_of(face.kind)), static_cast<double>(face.cells()),
         design.inputs->clearance_cells, scene.surroundings.faces[s].nearest, media, f.front().index,
         f.back().index,
         fmt::format("{:.3g} to {:.4g}", f.front().wavelength_cells, f.back().wavelength_cells),
         design.figures->mean_db, design.figures->worst_db});
  }
  text += "\n## Faces\n\n" + to_markdown(inputs);
  if (with_trade)
    for (const std::vector<Side>& group : alike_designs(scene))
      text += fmt::format("\n## Cells against expected error: {}, {}\n\n{}", names(group),
                          name_of(problem.face(group.front()).kind), trade_markdown(scene, group.front()));
  text += "\n## Warnings\n\n";
  for (const std::string& warning : scene.warnings) text += "- " + warning + "\n";
  if (scene.warnings.empty()) text += "None.\n";
  text += "\n## The tables, to paste into a scene\n\n```yaml\nshell:\n  faces:\n";
  for (Side side : all_sides)
    text += fmt::format("    {}:\n{}", name_of(side), yaml_of(problem.face(side), "      "));
  return text + "```\n";
}

std::string plane_wave_design_markdown(const Scene& scene, double largest_angle_rad, double shortest_cells,
                                       double longest_cells) {
  std::string text = fmt::format(
      "# Layers for plane waves only\n\n- scene {}\n- angles from 0 to {:g} deg, {:g} to {:g} cells per "
      "wavelength, "
      "in vacuum\n- waves that decay towards such a layer are reflected almost totally: keep sources and "
      "objects "
      "far from it\n",
      scene.file, largest_angle_rad / degree, shortest_cells, longest_cells);
  std::vector<Side> done;
  for (Side side : all_sides) {
    const Face& face = scene.problem.face(side);
    if (face.kind != FaceKind::moebius && face.kind != FaceKind::cfs_pml) continue;
    const double d = cell_m(scene, side);
    const auto same = [&](Side other) {
      return scene.problem.face(other).kind == face.kind &&
             scene.problem.face(other).cells() == face.cells() && same_cell(scene, other, side);
    };
    if (std::any_of(done.begin(), done.end(), same)) continue;
    done.push_back(side);
    const PlaneWaveRange range{c0_m_per_s * scene.problem.lattice.dt_s / d, shortest_cells, longest_cells,
                               largest_angle_rad};
    Face designed = face;
    double worst_db = 0.0;
    if (face.kind == FaceKind::moebius) {
      const auto found = design_moebius(range, face.cells(), d);
      designed.moebius = found.table;
      worst_db = found.figures.worst_db;
    } else {
      const auto found = design_cfs_pml(range, face.cells(), d);
      designed.layer = found.table;
      worst_db = found.figures.worst_db;
    }
    text += fmt::format("\n## {}, {} cells: worst {:.1f} dB\n\n```yaml\n{}```\n", name_of(face.kind),
                        face.cells(), worst_db, yaml_of(designed, ""));
  }
  return text;
}

}  // namespace wanewall
