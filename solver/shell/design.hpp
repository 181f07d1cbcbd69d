// Tables of absorbing layers, searched for from a few numbers of the scene.
//
// What is minimised is  F_Q = (1/Q) ln mean_i (w_i |R_i|)^Q  over the points of design_points.hpp, with
// closed- form gradients, Q falling step by step, from several starts of a generator of its own. Starts run
// side by side; the result does not depend on the number of threads.
#pragma once

#include <vector>

#include "solver/shell/design_points.hpp"
#include "solver/shell/layer_table.hpp"

namespace wanewall {

/// Most cells a layer can be designed with.
inline constexpr int most_designed_cells = 24;

/// How well a table does on its points [dB]: the mean of w |R|, which is what a reflected near field collects
/// relative to the wave that goes out, and the largest w |R|. At the worst probe of the box and the plate in
/// cases/shell_benchmarks the error in time, over the field's peak there, was from 4 dB below the mean to 9
/// dB above it down to -100 dB, and up to 15 dB above it at -147 dB.
struct DesignFigures {
  double mean_db = 0.0;
  double worst_db = 0.0;
};

template <class Table>
struct Designed {
  Table table;
  DesignFigures figures;
};

/// How far below a goal the mean of a design must be for the goal to count as met [dB]: the spread named
/// above, 10 dB for goals down to -100 dB and 15 dB beyond.
constexpr double design_margin_db(double goal_db) {
  return goal_db < -100.0 ? 15.0 : 10.0;
}

/// Cells of `spacing_m` along the normal. 1 <= cells <= most_designed_cells, else std::invalid_argument.
Designed<MoebiusTable> design_moebius(const DesignInputs& inputs, int cells, double spacing_m);
/// sigma, kappa >= 1 and alpha free at every E node and half node.
Designed<LayerTable> design_cfs_pml(const DesignInputs& inputs, int cells, double spacing_m);

/// The fewest cells, between `fewest_cells_for_goal` and `most`, whose mean is `design_margin_db` below the
/// goal; `most` cells when none is. More cells never do worse, so the count is found by halving.
inline constexpr int fewest_cells_for_goal = 3;
template <class Table>
struct DesignedForGoal {
  Designed<Table> design;
  bool is_met = false;
};
DesignedForGoal<MoebiusTable> moebius_for_goal(const DesignInputs& inputs, double goal_db, int most,
                                               double spacing_m);
DesignedForGoal<LayerTable> cfs_pml_for_goal(const DesignInputs& inputs, double goal_db, int most,
                                             double spacing_m);

/// For plane waves from 0 to an angle only, at wavelengths of `shortest_cells` to `longest_cells` cells: the
/// smallest worst reflection, with alpha = 0. Such a table reflects waves that decay towards the face almost
/// totally: sources and objects must be far from it.
struct PlaneWaveRange {
  double courant = 0.99 / 1.7320508075688772;  ///< S = c0 dt/d
  double shortest_cells = 10.0;
  double longest_cells = 100.0;
  double largest_angle_rad = 1.0;  ///< below pi/2
};
Designed<MoebiusTable> design_moebius(const PlaneWaveRange& range, int cells, double spacing_m);
Designed<LayerTable> design_cfs_pml(const PlaneWaveRange& range, int cells, double spacing_m);

/// The same measure for any table, searched or not.
DesignFigures figures_of(const MoebiusTable& table, const DesignInputs& inputs, double spacing_m);
DesignFigures figures_of(const LayerTable& table, const DesignInputs& inputs, double spacing_m);

}  // namespace wanewall
