// The loops that `wanewall speed` sets side by side, and the scenes that they march.
#pragma once

#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall {

struct SpeedSetting {
  int cells = 400;  ///< along each edge, shells included
  int steps = 16;   ///< in a round
  int rounds = 5;
  int threads = 2;
  bool more = false;               ///< also one thread, double precision, shells without anything else
  std::optional<TileShape> tiles;  ///< none: found by trying, before anything is timed
};

struct SpeedRow {
  std::string name;
  std::string id;                    ///< for machines
  double bytes_per_cell_step = 0.0;  ///< that must cross the memory at the least; 0: not said
  std::vector<double> rates{};       ///< Gcell/s (GB/s for the memory's own loops), one per round

  double median() const;
  double least() const;
  double most() const;
};

struct SpeedResult {
  SpeedSetting setting;
  std::vector<SpeedRow> memory;  ///< copy, triad
  std::vector<SpeedRow> loops;   ///< textbook first
  SpeedRow in_cache;
  TileShape bare_tiles, scene_tiles;
  double largest_difference = 0.0;  ///< textbook loop against the solver
  double bytes_per_cell = 0.0;      ///< memory of the full scene
  std::string vector_code;

  const SpeedRow& loop(const std::string& id) const;
  /// Bandwidth / 48 bytes [Gcell/s]: the most that a loop can do which takes every cell through the memory
  /// once a step.
  double one_sweep_limit() const;
};

/// All loops take turns in every round, so that a machine that slows down slows all. Throws std::logic_error
/// when two that must compute the same do not: then nothing may be printed.
SpeedResult measure_speed(const SpeedSetting& setting);

/// The scene called full: a Moebius shell of ten cells on six faces, an oblique plane wave, a metal ball, a
/// dielectric block and a lossy rod, and the shell audit at nine frequencies on all faces.
Problem full_speed_scene(int cells, int threads, Precision precision);

}  // namespace wanewall
