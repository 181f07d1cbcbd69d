// What the shell commands print.
#pragma once

#include <string>
#include <vector>

#include "io/picture.hpp"
#include "io/scene.hpp"
#include "postproc/table_text.hpp"
#include "solver/shell/prediction.hpp"

namespace wanewall {

/// Faces that are alike, with one medium that touches them, and what they reflect there.
struct FacePrediction {
  std::vector<Side> sides;
  int medium = 0;
  std::vector<PredictedReflection> waves;
};

/// One entry per distinct face and medium; walls and periodic faces are left out. `grid` is asked everywhere.
std::vector<FacePrediction> predict_shell(const Scene& scene, const PredictionGrid& grid);

std::string prediction_markdown(const Scene& scene, const std::vector<FacePrediction>& predictions,
                                double milliseconds_per_thousand);
Table prediction_table(const Scene& scene, const std::vector<FacePrediction>& predictions);
/// Reflection over angle at the middle one of the grid's frequencies: for each face and medium the exact
/// value and the continuum's.
LineChart prediction_chart(const Scene& scene, const std::vector<FacePrediction>& predictions);

/// Inputs, cells against expected error, warnings, and the tables as a `shell:` block to paste into a scene.
/// `with_trade`: also design 3 to 16 cells for every distinct face.
std::string design_markdown(const Scene& scene, bool with_trade);

/// Designs for plane waves only, in vacuum, with the scene's cells and time step.
std::string plane_wave_design_markdown(const Scene& scene, double largest_angle_rad, double shortest_cells,
                                       double longest_cells);

}  // namespace wanewall
