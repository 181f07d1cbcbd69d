// The layers of the shell: tables that are listed, follow a polynomial, or are designed for the scene.
#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"
#include "io/scene/read.hpp"

namespace wanewall::scene {
namespace {

using Origin = FaceDesign::Origin;

FaceKind kind_of(const std::string& word) {
  for (FaceKind kind : {FaceKind::moebius, FaceKind::cfs_pml, FaceKind::matched_slab, FaceKind::one_way,
                        FaceKind::electric_wall, FaceKind::magnetic_wall})
    if (word == name_of(kind)) return kind;
  return FaceKind::periodic;
}

/// The alpha at the layer's inner face that lets slow tails decay: a fifth of what matches the lowest
/// frequency.
constexpr double alpha_part_of_band = 0.2;
constexpr int cells_of_polynomial = 10, cells_in_single = 6, cells_in_double = 8;
/// Most cells that a search for a goal tries: graded layers take much longer and gain little beyond.
constexpr int most_moebius_cells = most_designed_cells, most_graded_cells = 16;
/// Where rounding in single precision ends what a shell can do [dB].
constexpr double single_precision_floor_db = -95.0;
constexpr double thin_clearance_cells = 2.0;

const std::vector<std::string> polynomial_keys{"order",     "reflection", "sigma_max",
                                               "kappa_max", "alpha_max",  "alpha_order"};
const std::vector<std::string> graded_lists{"sigma_e", "sigma_h", "kappa_e", "kappa_h", "alpha_e", "alpha_h"};
const std::vector<std::string> moebius_lists{"sigma", "kappa", "alpha"};
const std::vector<std::string> design_keys{"clearance", "index"};

/// The keys that a kind takes beside `kind`.
std::vector<std::string> keys_of(FaceKind kind) {
  std::vector<std::string> keys;
  const auto add = [&](const std::vector<std::string>& more) {
    keys.insert(keys.end(), more.begin(), more.end());
  };
  if (has_layer(kind)) add({"cells"});
  if (kind == FaceKind::moebius) add(moebius_lists);
  if (kind == FaceKind::cfs_pml) {
    add({"profile"});
    add(polynomial_keys);
    add(graded_lists);
  }
  if (kind == FaceKind::moebius || kind == FaceKind::cfs_pml) add(design_keys);
  if (kind == FaceKind::matched_slab) add({"order", "reflection", "sigma_max", "sigma_e", "sigma_h"});
  if (kind == FaceKind::one_way) add({"order"});
  return keys;
}

bool any_itself(const Cursor& face, const std::vector<std::string>& keys) {
  return std::any_of(keys.begin(), keys.end(), [&](const std::string& key) { return face.has_itself(key); });
}
bool any(const Cursor& face, const std::vector<std::string>& keys) {
  return std::any_of(keys.begin(), keys.end(), [&](const std::string& key) { return face.has(key); });
}

/// A key that the kind does not take is an error, unless it comes from every_face and the kind does not: then
/// the face differs on purpose.
void refuse_other_keys(const Cursor& face, FaceKind kind) {
  const std::vector<std::string> taken = keys_of(kind);
  for (const auto* group : {&polynomial_keys, &graded_lists, &moebius_lists, &design_keys})
    for (const std::string& key : *group) {
      if (std::find(taken.begin(), taken.end(), key) != taken.end()) continue;
      if (!(face.has_itself(key) || (!face.has_itself("kind") && face.has(key)))) continue;
      const bool by_default = !face.has("kind");
      face.reject_text(
          key,
          fmt::format("{} is given for a face of kind {}{}", face.given_path(key), name_of(kind),
                      by_default ? ", the default" : ""),
          taken.empty() ? "no layer keys, since this face has no layer" : "kind, " + joined(taken),
          "remove it or choose another kind, such as cfs_pml");
    }
  if (face.has_itself("profile") && kind != FaceKind::cfs_pml)
    face.reject_text("profile",
                     fmt::format("{} is given for a face of kind {}", face.path("profile"), name_of(kind)),
                     "a profile for faces of kind cfs_pml", "remove it or choose kind: cfs_pml");
}

/// What the face says itself goes before what every face says.
Origin origin_of(Cursor& face, FaceKind kind) {
  if (kind == FaceKind::moebius) return any(face, moebius_lists) ? Origin::listed : Origin::searched;
  if (kind == FaceKind::matched_slab)
    return any(face, {"sigma_e", "sigma_h"}) ? Origin::listed : Origin::polynomial;
  Origin origin = Origin::searched;
  if (any_itself(face, graded_lists))
    origin = Origin::listed;
  else if (any_itself(face, polynomial_keys))
    origin = Origin::polynomial;
  else if (any(face, graded_lists))
    origin = Origin::listed;
  else if (any(face, polynomial_keys))
    origin = Origin::polynomial;
  constexpr const char* names[]{"searched", "polynomial", "listed"};
  if (!face.has("profile")) {
    face.use("profile", names[static_cast<std::size_t>(origin)]);
    return origin;
  }
  const std::string word = face.word("profile");
  const Origin wanted = word == "searched"     ? Origin::searched
                        : word == "polynomial" ? Origin::polynomial
                                               : Origin::listed;
  // No keys at all are a polynomial's defaults.
  if (wanted != origin && !(wanted == Origin::polynomial && origin == Origin::searched))
    face.reject_text(
        "profile",
        fmt::format("{} = {} does not go with the other keys of the face", face.given_path("profile"), word),
        "searched without tables or grading; polynomial with " + joined(polynomial_keys) + "; listed with " +
            joined(graded_lists),
        "remove `profile` or the other keys");
  return wanted;
}

std::string list_text(const std::vector<double>& values, const char* unit) {
  std::string text;
  for (double v : values) text += fmt::format("{}{:.17g}{}", text.empty() ? "" : ", ", v, unit);
  return "[" + text + "]";
}

struct ListedColumn {
  const char* key;
  std::vector<double>* values;
  double missing;  ///< stands in for a list that is not given; NaN: must be given
};

/// Lists of equal length, one value per cell.
void read_lists(Cursor& face, std::vector<ListedColumn> columns) {
  std::size_t cells = 0;
  std::string first;
  for (ListedColumn& column : columns) {
    if (!face.has(column.key)) continue;
    *column.values = face.quantities(column.key);
    if (first.empty()) {
      first = column.key;
      cells = column.values->size();
    } else if (column.values->size() != cells) {
      face.reject_text(column.key,
                       fmt::format("{} has {} values and {} has {}", face.given_path(column.key),
                                   column.values->size(), first, cells),
                       "lists of equal length, one value per cell of the layer, innermost first",
                       "make them equally long");
    }
  }
  for (ListedColumn& column : columns) {
    if (!column.values->empty()) continue;
    if (std::isnan(column.missing))
      face.reject_text(first, fmt::format("{} lists {} but not {}", face.path(), first, column.key),
                       "both of them", fmt::format("add `{}:` with {} values", column.key, cells));
    column.values->assign(cells, column.missing);
  }
  if (face.has("cells") && face.whole("cells") != static_cast<long>(cells))
    face.reject("cells", fmt::format("{}, as many as the lists have values", cells),
                "remove it or change it");
  if (!face.has("cells")) face.use("cells", fmt::format("{}", cells));
}

void read_listed(Cursor& block, Face& face) {
  const double needed = std::nan("");
  if (face.kind == FaceKind::moebius) {
    read_lists(block, {{"sigma", &face.moebius.sigma_s_per_m, needed},
                       {"kappa", &face.moebius.kappa, 1.0},
                       {"alpha", &face.moebius.alpha_s_per_m, 0.0}});
    return;
  }
  LayerTable& t = face.layer;
  std::vector<ListedColumn> columns{{"sigma_e", &t.sigma_e_s_per_m, needed},
                                    {"sigma_h", &t.sigma_h_s_per_m, needed}};
  if (face.kind == FaceKind::cfs_pml) {
    columns.insert(columns.end(), {{"kappa_e", &t.kappa_e, 1.0},
                                   {"kappa_h", &t.kappa_h, 1.0},
                                   {"alpha_e", &t.alpha_e_s_per_m, 0.0},
                                   {"alpha_h", &t.alpha_h_s_per_m, 0.0}});
  }
  read_lists(block, columns);
  for (auto* kappa : {&t.kappa_e, &t.kappa_h}) kappa->resize(t.sigma_e_s_per_m.size(), 1.0);
  for (auto* alpha : {&t.alpha_e_s_per_m, &t.alpha_h_s_per_m}) alpha->resize(t.sigma_e_s_per_m.size(), 0.0);
}

/// The number of cells given, or else `fallback`.
int read_cells(Cursor& block, FaceKind kind, int fallback, int most) {
  if (!block.has("cells")) {
    block.use("cells", fmt::format("{}", fallback));
    return fallback;
  }
  const auto cells = static_cast<int>(block.whole("cells"));
  if (cells == 0)
    block.reject("cells",
                 fmt::format("a whole number from 1 to {} for a face of kind {}", most, name_of(kind)),
                 "for no layer at all choose kind: electric_wall or one_way");
  if (cells > most)
    block.reject("cells", fmt::format("at most {} cells of a layer that is searched for", most),
                 "take fewer, or list the tables of a thicker layer");
  return cells;
}

void read_polynomial(Cursor& block, const Scene& scene, std::optional<double> goal_db, double cell_m,
                     Face& face) {
  const int cells = read_cells(block, face.kind, cells_of_polynomial, 64);
  PolynomialGrading grading;
  if (block.has("order"))
    grading.order = block.number("order");
  else
    block.use("order", format_number(grading.order));
  // What the face says itself goes before what every face says.
  const bool by_sigma = block.has("sigma_max") && !block.has_itself("reflection");
  if (by_sigma) {
    grading.sigma_max_s_per_m = block.quantity("sigma_max");
  } else if (block.has("reflection") || goal_db) {
    const double r0_db = block.has("reflection") ? block.quantity("reflection") : *goal_db;
    if (!block.has("reflection")) block.use("reflection", format_quantity(r0_db, Family::level));
    grading.sigma_max_s_per_m =
        sigma_max_for_reflection(std::pow(10.0, r0_db / 20.0), grading.order, cells * cell_m);
    block.use("sigma_max", format_quantity(grading.sigma_max_s_per_m, Family::conductivity));
  } else {
    const Problem& problem = scene.problem;
    grading.sigma_max_s_per_m = sigma_max_rule(
        grading.order, cell_m, problem.media[static_cast<std::size_t>(problem.background)].permittivity_rel);
    block.use("sigma_max", format_quantity(grading.sigma_max_s_per_m, Family::conductivity));
  }
  if (face.kind == FaceKind::cfs_pml) {
    grading.kappa_max = block.number("kappa_max");
    if (block.has("alpha_max")) {
      grading.alpha_max_s_per_m = block.quantity("alpha_max");
    } else {
      grading.alpha_max_s_per_m = alpha_part_of_band * 2.0 * pi * eps0_f_per_m * scene.band_lo_hz;
      block.use("alpha_max", format_quantity(grading.alpha_max_s_per_m, Family::conductivity));
    }
    grading.alpha_order = block.number("alpha_order");
  }
  face.layer = polynomial_layer(grading, cells);
}

/// A search that one or more faces share.
struct Search {
  FaceKind kind;
  double cell_m;
  DesignInputs inputs;
  int cells;  ///< 0: the fewest for the goal
  double goal_db;
  bool is_met = true;
  Designed<MoebiusTable> moebius;
  Designed<LayerTable> graded;

  bool same_as(const Search& other) const {
    return kind == other.kind && std::abs(cell_m - other.cell_m) < 1e-9 * cell_m && cells == other.cells &&
           goal_db == other.goal_db && inputs == other.inputs;
  }
  void carry_out() {
    if (kind == FaceKind::moebius && cells > 0) moebius = design_moebius(inputs, cells, cell_m);
    if (kind == FaceKind::cfs_pml && cells > 0) graded = design_cfs_pml(inputs, cells, cell_m);
    if (cells > 0) return;
    if (kind == FaceKind::moebius) {
      const auto found = moebius_for_goal(inputs, goal_db, most_moebius_cells, cell_m);
      moebius = found.design;
      is_met = found.is_met;
    } else {
      const auto found = cfs_pml_for_goal(inputs, goal_db, most_graded_cells, cell_m);
      graded = found.design;
      is_met = found.is_met;
    }
  }
};

void read_searched(Cursor& block, const Scene& scene, std::optional<double> goal_db, double cell_m,
                   Face& face, FaceDesign& design, std::vector<Search>& done) {
  const bool in_single = scene.problem.precision == Precision::single_precision;
  Search search{face.kind, cell_m, as_designed(*design.inputs), 0, 0.0, true, {}, {}};
  if (block.has("cells") || !goal_db)
    search.cells =
        read_cells(block, face.kind, in_single ? cells_in_single : cells_in_double, most_designed_cells);
  else
    // More cells than rounding lets work are wasted.
    search.goal_db =
        in_single
            ? std::max(*goal_db, single_precision_floor_db + design_margin_db(single_precision_floor_db))
            : *goal_db;
  auto found = std::find_if(done.begin(), done.end(), [&](const Search& s) { return s.same_as(search); });
  if (found == done.end()) {
    search.carry_out();
    done.push_back(search);
    found = done.end() - 1;
  }
  if (search.cells == 0) design.goal_db = goal_db;
  if (face.kind == FaceKind::moebius) {
    face.moebius = found->moebius.table;
    block.use("sigma", list_text(face.moebius.sigma_s_per_m, " S/m"));
    block.use("kappa", list_text(face.moebius.kappa, ""));
    block.use("alpha", list_text(face.moebius.alpha_s_per_m, " S/m"));
  } else {
    const LayerTable& t = face.layer = found->graded.table;
    block.use("sigma_e", list_text(t.sigma_e_s_per_m, " S/m"));
    block.use("sigma_h", list_text(t.sigma_h_s_per_m, " S/m"));
    block.use("kappa_e", list_text(t.kappa_e, ""));
    block.use("kappa_h", list_text(t.kappa_h, ""));
    block.use("alpha_e", list_text(t.alpha_e_s_per_m, " S/m"));
    block.use("alpha_h", list_text(t.alpha_h_s_per_m, " S/m"));
  }
  if (search.cells == 0) block.use("cells", fmt::format("{}", face.cells()));
}

/// Words for what stands nearest to the face.
void warn_of_design(Reading& reading, const Cursor& shell, const Scene& scene, Side side,
                    std::optional<double> goal_db) {
  const auto s = static_cast<std::size_t>(index_of(side));
  const FaceDesign& design = scene.designs[s];
  if (!design.figures) return;
  const Face& face = scene.problem.face(side);
  const double mean_db = design.figures->mean_db;
  if (goal_db && mean_db > *goal_db - design_margin_db(*goal_db)) {
    const bool floor =
        scene.problem.precision == Precision::single_precision && mean_db <= single_precision_floor_db;
    if (!floor)
      reading.warn(
          shell.place("goal"),
          fmt::format("{} is not sure to meet the goal of {:.1f} dB: {:.1f} dB is expected of its {} {} "
                      "cells, and {:.0f} dB of that may be missing; give it more cells{}",
                      name_of(side), *goal_db, mean_db, face.cells(), name_of(face.kind),
                      design_margin_db(*goal_db), face.kind == FaceKind::moebius ? "" : " or kind: moebius"));
  }
  const FaceSurroundings& near = scene.surroundings.faces[s];
  if (design.inputs && design.inputs->clearance_cells < thin_clearance_cells && !near.nearest.empty())
    reading.warn(shell.place(),
                 fmt::format("{} stands {} cells from {}: its near field reaches into the layer; leave 3 "
                             "cells or more",
                             near.nearest, format_number(design.inputs->clearance_cells, 2), name_of(side)));
}

/// What a design takes from the scene, with the user's own values in front.
DesignOverrides read_overrides(Cursor& shell, ShellSurroundings& found) {
  DesignOverrides overrides;
  Cursor block = shell.block("design");
  if (block.has("diagonal"))
    overrides.diagonal_m = block.quantity("diagonal");
  else
    block.use("diagonal", format_quantity(found.diagonal_m, Family::length));
  if (block.has("top_frequency"))
    overrides.top_frequency_hz = block.quantity("top_frequency");
  else
    block.use("top_frequency", format_quantity(found.top_frequency_hz, Family::frequency));
  if (block.has("statics"))
    overrides.statics = block.yes("statics");
  else
    block.use("statics", found.has_statics || found.is_long ? "true" : "false");
  return overrides;
}

}  // namespace

Cursor face_block(Cursor& root, Side side) {
  Cursor shell = root.block("shell");
  Cursor every = shell.block("every_face");
  Cursor faces = shell.block("faces");
  return faces.block_under(std::string(name_of(side)), every);
}

void read_kinds(Cursor& root, Scene& scene) {
  for (Side side : all_sides) {
    Face& face = scene.problem.faces[static_cast<std::size_t>(index_of(side))];
    Cursor block = face_block(root, side);
    face.kind = kind_of(block.word("kind"));
    refuse_other_keys(block, face.kind);
    if (has_layer(face.kind)) continue;
    if (block.has_itself("cells") && block.whole("cells") != 0)
      block.reject("cells", fmt::format("0 for a face of kind {}", name_of(face.kind)), "remove it");
    if (face.kind != FaceKind::one_way) continue;
    face.one_way_order = 1;
    if (!block.has("order")) {
      block.use("order", "1");
      continue;
    }
    const double order = block.number("order");
    if (order != 1.0 && order != 2.0)
      block.reject("order", "1 or 2 for a face of kind one_way", "choose one of the two");
    face.one_way_order = static_cast<int>(order);
  }
}

void read_layers(Cursor& root, Reading& reading, Scene& scene) {
  Problem& problem = scene.problem;
  Cursor shell = root.block("shell");
  std::optional<double> goal_db;
  if (shell.has("goal")) goal_db = shell.quantity("goal");
  scene.surroundings = surroundings_of(problem, scene.band_hi_hz);
  scene.design_overrides = read_overrides(shell, scene.surroundings);
  std::vector<Search> done;
  for (Side side : all_sides) {
    const auto s = static_cast<std::size_t>(index_of(side));
    Face& face = problem.faces[s];
    Cursor block = face_block(root, side);
    if (!has_layer(face.kind)) continue;
    const double cell_m = problem.lattice.along(axis_of(side)).smallest_cell_m();
    FaceDesign& design = scene.designs[s];
    design.origin = origin_of(block, face.kind);
    if (face.kind != FaceKind::matched_slab) {
      DesignOverrides overrides = scene.design_overrides;
      if (block.has("clearance")) overrides.clearance_cells = block.number("clearance");
      if (block.has("index")) overrides.index = block.number("index");
      design.inputs = design_inputs(problem, scene.surroundings, side, overrides);
      if (!overrides.clearance_cells)
        block.use("clearance", format_number(design.inputs->clearance_cells, 6));
      if (!overrides.index) block.use("index", format_number(design.inputs->frequencies.front().index, 6));
    }
    if (design.origin == Origin::listed) read_listed(block, face);
    if (design.origin == Origin::polynomial) read_polynomial(block, scene, goal_db, cell_m, face);
    if (design.origin == Origin::searched) read_searched(block, scene, goal_db, cell_m, face, design, done);
    if (design.inputs)
      design.figures = face.kind == FaceKind::moebius ? figures_of(face.moebius, *design.inputs, cell_m)
                                                      : figures_of(face.layer, *design.inputs, cell_m);
    warn_of_design(reading, shell, scene, side, goal_db);
  }
  if (goal_db && problem.precision == Precision::single_precision && *goal_db < single_precision_floor_db)
    reading.warn(shell.place("goal"),
                 fmt::format("in single precision rounding ends near {:.0f} dB whatever the shell; choose "
                             "precision: double",
                             single_precision_floor_db));
}

}  // namespace wanewall::scene
