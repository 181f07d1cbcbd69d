// What a run hands back, as plain data, and the sink it writes to while it runs.
#pragma once

#include <complex>
#include <string>
#include <variant>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall {

/// One component of one snapshot at one step. Values are in V/m or A/m, index order [x][y][z] with z fastest.
/// positions_m[a] holds the coordinates along axis a (one entry for a plane's normal). A plane's values are
/// linearly interpolated along its normal from the two nearest lattice layers.
struct Snapshot {
  std::string name;
  long step = 0;
  double time_s = 0.0;  ///< n dt for E, (n + 1/2) dt for H
  Component component = Component::ex;
  std::array<std::vector<double>, 3> positions_m;
  std::variant<std::vector<float>, std::vector<double>> values;
};

/// Takes snapshots as the run makes them. May throw; the run then stops and the exception passes through.
class Sink {
 public:
  virtual ~Sink() = default;
  virtual void take(Snapshot snapshot) = 0;
};

/// How far a run is.
struct Progress {
  long step = 0;
  long last_step = 0;
  double seconds = 0.0;
  double cells_per_second = 0.0;
  double energy_db = 0.0;  ///< relative to the largest so far
};

/// Asked between blocks of steps, about every few hundredths of a second of a run or, where a block takes
/// longer, after each. Answers false to end the run there.
class Monitor {
 public:
  virtual ~Monitor() = default;
  virtual bool go_on(const Progress& progress) = 0;
};

/// Field at a point, interpolated linearly along each axis from each component's own positions.
struct PointSeries {
  std::string name;
  Vec3 position_m{};
  /// [component][step]: step n holds E at n dt and H at (n + 1/2) dt; V/m and A/m; one entry per step, from
  /// 0.
  std::array<std::vector<double>, 6> values;
};

/// Energy in the clear volume at a step n: sum over its edges and faces of eps E(n)^2 / 2 + mu H(n + 1/2)^2 /
/// 2, times the volume that belongs to each [J]. The half step between E and H makes it ripple; it is a
/// gauge, not a balance.
struct EnergySeries {
  std::vector<long> step;
  std::vector<double> joule;
};

/// Running DFT on one plane of one component:  F = Q dt sum over sampled n of f(t_n) exp(-j omega t_n), with
/// t_n the component's own time (n dt or (n + 1/2) dt) and Q = sample_every. V s/m or A s/m.
struct AuditPlane {
  Component component = Component::ex;
  int normal_index = 0;        ///< index of the component along the face's normal
  double normal_m = 0.0;       ///< and its coordinate
  std::array<int, 2> shape{};  ///< stored indices along the two tangential axes, in the order x, y, z
  std::vector<std::complex<double>> sums;  ///< [frequency][first][second]; first and second start at index 0
};

/// Media that depend on z only, as the update has them on the whole z axis, shell included. Node k and half
/// node k + 1/2 have index k. E across z and H along z live on nodes, E along z and H across z on half nodes.
struct LayeredProfile {
  std::vector<double> permittivity_rel_node, conductivity_s_per_m_node;
  std::vector<double> permittivity_rel_half, conductivity_s_per_m_half;
  std::vector<double> permeability_rel_node, magnetic_conductivity_ohm_per_m_node;
  std::vector<double> permeability_rel_half, magnetic_conductivity_ohm_per_m_half;
  bool empty() const { return permittivity_rel_node.empty(); }
};

/// Planes of one face, over the whole cross-section out to the outer walls. "Plane m" counts outwards:
/// m = 0, 1, 2 are node planes, plane 2 at the shell's first node; half plane m lies half a cell outside
/// plane m.
struct AuditFace {
  Side side = Side::x_lo;
  /// True when the whole cross-section at the planes, side shells included, lies in one medium (split on
  /// tangential E). False on side faces of scenes layered along z (E_z and H_z recorded instead) and where
  /// objects cross the planes.
  bool is_uniform = true;
  /// True when the clear part of it lies in one medium: then tangential E is recorded, unless layers run
  /// through the side shells.
  bool clear_is_uniform = true;
  /// True when media at the planes, side shells included, depend on z only.
  bool is_layered = false;
  /// True when the media of the planes go on to the outer wall. An object inside the face's own shell makes
  /// it false; the split does not need it, the expected reading does.
  bool goes_on_to_wall = true;
  /// Medium at the middle of the face's plane.
  double permittivity_rel = 1.0;
  double permeability_rel = 1.0;
  double conductivity_s_per_m = 0.0;
  double magnetic_conductivity_ohm_per_m = 0.0;
  LayeredProfile profile;  ///< of a layered face; empty where the face is uniform or crossed
  /// Uniform: both tangential E on planes 0, 1, 2 and both tangential H on half plane 0.
  /// Layered: E_z on planes 0, 1, 2 and H_z on half planes -1, 0, 1; the other tangential E on plane 0, the
  /// other tangential H on half plane 0. In both cases plane 0 and half plane 0 hold all four tangential
  /// components.
  std::vector<AuditPlane> planes;
};

struct AuditRecord {
  std::vector<double> frequencies_hz;
  int sample_every = 1;  ///< Q, steps
  std::vector<AuditFace> faces;
  std::array<Face, 6> shell;  ///< what ended the lattice on every side, indexed by Side
  /// Incident plane wave's spectrum at its phase origin, |E| [V s/m], one per frequency; empty without one.
  std::vector<std::complex<double>> incident_v_s_per_m;
  Vec3 incident_direction{};  ///< unit vector of propagation
  double incident_impedance_ohm = 0.0;
};

enum class StopReason { reached_end, energy_fell, interrupted, not_finite };
std::string_view name_of(StopReason reason);

struct RunResult {
  long steps = 0;
  StopReason reason = StopReason::reached_end;
  std::string not_finite_where;  ///< component and cell, when reason is not_finite
  std::vector<PointSeries> points;
  EnergySeries energy;
  AuditRecord audit;
  int threads = 1;
  std::string vector_code;              ///< "AVX-512", "AVX2" or "baseline"
  Schedule schedule = Schedule::tiles;  ///< what was used, see Problem::schedule
  TileShape tiles;                      ///< of the tiled schedule
  bool tiles_are_settled = true;        ///< false when the run ended before all shapes had been tried
  double build_seconds = 0.0;
  double march_seconds = 0.0;
};

/// Runs a problem from zero fields. Throws ProblemError before the first step when it cannot be computed as
/// asked. A single-precision or double-precision solver is chosen by the problem. The result does not depend
/// on the number of threads or the schedule, bit for bit.
RunResult run(const Problem& problem, Sink& sink, Monitor& monitor);

/// Memory a run will need, by purpose [bytes].
struct Footprint {
  double fields = 0, layer_memory = 0, media = 0, audit = 0, snapshots = 0, other = 0;
  double total() const { return fields + layer_memory + media + audit + snapshots + other; }
};
Footprint footprint_of(const Problem& problem);

}  // namespace wanewall
