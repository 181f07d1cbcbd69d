// Pictures of curves, drawn by gnuplot into SVG files.
#pragma once

#include <optional>
#include <string>
#include <utility>
#include <vector>

namespace wanewall {

struct Curve {
  std::string label;
  std::vector<double> x;
  std::vector<double> y;  ///< as many as x; values that are not finite leave a gap
};

struct LineChart {
  std::string title;
  std::string x_label, y_label;  ///< with units
  std::optional<std::pair<double, double>> x_range, y_range;
  std::vector<Curve> curves;
};

/// What gnuplot is told. Colours stay apart for colour-blind readers (M. Okabe and K. Ito, Color Universal
/// Design, 2008; values from memory), line patterns in print without colour.
std::string gnuplot_script(const LineChart& chart);

/// Writes the chart as an SVG file, whole or not at all. Throws FileError when the program gnuplot is
/// missing (and names its package), when it fails, and when the file cannot be written.
void draw_svg(const LineChart& chart, const std::string& path);

/// Of every `size / most_points` neighbours, the one with the largest y: a curve that keeps its peaks.
Curve thinned(const Curve& curve, std::size_t most_points);

}  // namespace wanewall
