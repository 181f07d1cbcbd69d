#include "solver/shell/design.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <stdexcept>
#include <string>

#include "geometry/constants.hpp"
#include "solver/shell/graded_objective.hpp"
#include "solver/shell/lattice_reflection.hpp"
#include "solver/shell/minimise.hpp"
#include "solver/shell/moebius_objective.hpp"

namespace wanewall {
namespace {

constexpr std::uint64_t seed = 1;
constexpr double least_gain = 1e-7;

/// One leg of a search: the norm, the most steps at it, and how many of the starts go on after it, the best
/// ones.
struct Leg {
  double norm;
  int steps, keep;
};
/// The mean norm at the end is what a reflected field collects; the higher ones before it keep the search
/// from giving up single points. The many unknowns of a graded layer need many steps, so only the promising
/// starts get them.
constexpr Leg moebius_near_field[]{{6.0, 1000, 12}, {2.0, 1000, 12}, {1.0, 2000, 1}};
constexpr Leg graded_near_field[]{{6.0, 150, 6}, {2.0, 600, 3}, {1.0, 1500, 1}};
/// Towards the worst point.
constexpr Leg moebius_plane_waves[]{{6.0, 500, 12}, {25.0, 500, 12}, {100.0, 700, 12}, {400.0, 1000, 1}};
constexpr Leg graded_plane_waves[]{{6.0, 150, 6}, {25.0, 500, 4}, {100.0, 700, 3}, {400.0, 1500, 1}};

constexpr int starts = 12;

double to_db(double ln_amplitude) {
  return 20.0 / std::log(10.0) * ln_amplitude;
}

void check_cells(int cells) {
  if (cells < 1 || cells > most_designed_cells)
    throw std::invalid_argument("a layer of " + std::to_string(cells) + " cells cannot be designed");
}

/// The best of all starts, by the last leg's norm.
template <std::size_t n>
std::vector<double> search(const LayerObjective& objective, const Leg (&legs)[n]) {
  struct Start {
    std::vector<double> y;
    double value;
  };
  SplitMix dice(seed);
  std::vector<Start> all;
  for (int s = 0; s < starts; ++s) all.push_back({objective.start(s, [&] { return dice.next(); }), 0.0});
  for (const Leg& leg : legs) {
#pragma omp parallel for schedule(dynamic, 1)
    for (std::size_t s = 0; s < all.size(); ++s)
      all[s].value =
          minimise([&](const std::vector<double>& y,
                       std::vector<double>& gradient) { return objective.value(y, leg.norm, &gradient); },
                   all[s].y, leg.steps, least_gain);
    std::stable_sort(all.begin(), all.end(),
                     [](const Start& a, const Start& b) { return a.value < b.value; });
    all.resize(std::min(all.size(), static_cast<std::size_t>(leg.keep)));
  }
  return all.front().y;
}

DesignFigures figures(const LayerObjective& objective, const std::vector<double>& y) {
  return {to_db(objective.value(y, 1.0, nullptr)), to_db(objective.largest(y))};
}

double largest_index(const DesignInputs& inputs) {
  double n = 1.0;
  for (const DesignFrequency& f : inputs.frequencies) n = std::max(n, f.index);
  return n;
}

/// About what one more cell gains; a first guess only.
constexpr double db_per_cell = 12.0;

template <class Design>
auto fewest(const Design& design, double goal_db, int most) {
  using Table = decltype(design(1).table);
  const auto meets = [&](const Designed<Table>& d) {
    return d.figures.mean_db <= goal_db - design_margin_db(goal_db);
  };
  int cells = static_cast<int>(std::lround((design_margin_db(goal_db) - goal_db) / db_per_cell));
  cells = std::clamp(cells, fewest_cells_for_goal, most);
  DesignedForGoal<Table> best{design(cells), false};
  best.is_met = meets(best.design);
  if (best.is_met) {
    while (cells > fewest_cells_for_goal) {
      const Designed<Table> fewer = design(--cells);
      if (!meets(fewer)) break;
      best.design = fewer;
    }
    return best;
  }
  while (!best.is_met && cells < most) {
    const Designed<Table> more = design(++cells);
    best.is_met = meets(more);
    if (more.figures.mean_db < best.design.figures.mean_db || best.is_met) best.design = more;
  }
  return best;
}

/// The measure for any table, through the reflection that the audit and the prediction use.
template <class Table>
DesignFigures figures_on_lattice(const Table& table, const DesignInputs& inputs, double spacing_m) {
  using Complex = std::complex<double>;
  double sum = 0.0, largest = 0.0;
  std::size_t count = 0;
  for (const DesignPoints& points : near_field_points(inputs)) {
    const double omega = points.k0 * c0_m_per_s / spacing_m;
    for (std::size_t i = 0; i < points.weight.size(); ++i) {
      const Complex q(points.q_re[i], points.q_im[i]);
      const Complex k2 = -4.0 * q * q / (1.0 - q * q) / (spacing_m * spacing_m);
      const double r =
          points.weight[i] *
          std::abs(layer_reflection(table, spacing_m, points.courant * spacing_m / c0_m_per_s, omega, k2));
      sum += r;
      largest = std::max(largest, r);
      ++count;
    }
  }
  return {to_db(std::log(sum / static_cast<double>(count))), to_db(std::log(largest))};
}

}  // namespace

Designed<MoebiusTable> design_moebius(const DesignInputs& inputs, int cells, double spacing_m) {
  check_cells(cells);
  const MoebiusObjective objective(near_field_points(inputs), cells, inputs.alpha_min, largest_index(inputs));
  const std::vector<double> y = search(objective, moebius_near_field);
  return {objective.table(y, spacing_m), figures(objective, y)};
}

Designed<LayerTable> design_cfs_pml(const DesignInputs& inputs, int cells, double spacing_m) {
  check_cells(cells);
  const GradedObjective objective(near_field_points(inputs), cells, inputs.alpha_min);
  const std::vector<double> y = search(objective, graded_near_field);
  return {objective.table(y, spacing_m), figures(objective, y)};
}

DesignedForGoal<MoebiusTable> moebius_for_goal(const DesignInputs& inputs, double goal_db, int most,
                                               double spacing_m) {
  return fewest([&](int cells) { return design_moebius(inputs, cells, spacing_m); }, goal_db, most);
}

DesignedForGoal<LayerTable> cfs_pml_for_goal(const DesignInputs& inputs, double goal_db, int most,
                                             double spacing_m) {
  return fewest([&](int cells) { return design_cfs_pml(inputs, cells, spacing_m); }, goal_db, most);
}

Designed<MoebiusTable> design_moebius(const PlaneWaveRange& range, int cells, double spacing_m) {
  check_cells(cells);
  const MoebiusObjective objective(
      plane_wave_points(range.courant, range.shortest_cells, range.longest_cells, range.largest_angle_rad),
      cells, 0.0, 1.0);
  const std::vector<double> y = search(objective, moebius_plane_waves);
  return {objective.table(y, spacing_m), figures(objective, y)};
}

Designed<LayerTable> design_cfs_pml(const PlaneWaveRange& range, int cells, double spacing_m) {
  check_cells(cells);
  const GradedObjective objective(
      plane_wave_points(range.courant, range.shortest_cells, range.longest_cells, range.largest_angle_rad),
      cells, 0.0);
  const std::vector<double> y = search(objective, graded_plane_waves);
  return {objective.table(y, spacing_m), figures(objective, y)};
}

DesignFigures figures_of(const MoebiusTable& table, const DesignInputs& inputs, double spacing_m) {
  return figures_on_lattice(table, inputs, spacing_m);
}

DesignFigures figures_of(const LayerTable& table, const DesignInputs& inputs, double spacing_m) {
  return figures_on_lattice(table, inputs, spacing_m);
}

}  // namespace wanewall
