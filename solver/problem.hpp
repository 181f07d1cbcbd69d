// All that a run needs, as plain data. Nothing here knows a file, a terminal or a scene language.
#pragma once

#include <array>
#include <optional>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "geometry/lattice.hpp"
#include "geometry/media.hpp"
#include "geometry/objects.hpp"
#include "solver/illumination/pulse.hpp"
#include "solver/shell/layer_table.hpp"

namespace wanewall {

enum class Precision { single_precision, double_precision };
constexpr std::size_t bytes_of(Precision p) {
  return p == Precision::single_precision ? 4 : 8;
}

enum class FaceKind { moebius, cfs_pml, matched_slab, one_way, electric_wall, magnetic_wall, periodic };
std::string_view name_of(FaceKind kind);
/// Whether the kind has layer cells outside the clear volume.
constexpr bool has_layer(FaceKind kind) {
  return kind == FaceKind::moebius || kind == FaceKind::cfs_pml || kind == FaceKind::matched_slab;
}
constexpr bool absorbs(FaceKind kind) {
  return has_layer(kind) || kind == FaceKind::one_way;
}

/// One face of the shell. Its table has as many cells as the lattice's shell on that side: `moebius` of a
/// moebius face, `layer` of the other layers; `matched_slab` uses only the conductivities. Walls, one_way and
/// periodic faces have none.
struct Face {
  FaceKind kind = FaceKind::electric_wall;
  LayerTable layer;
  MoebiusTable moebius;
  int one_way_order = 1;  ///< 1 or 2

  int cells() const { return kind == FaceKind::moebius ? moebius.cells() : layer.cells(); }
  bool operator==(const Face&) const = default;
};

/// Plane wave through a total-field/scattered-field surface.
///   theta from +z, phi from +x: where the wave comes from; e_angle turns E from the theta unit vector
///   towards phi's.
struct PlaneWave {
  double theta_rad = 0.0;
  double phi_rad = 0.0;
  double e_angle_rad = 0.0;
  double peak_v_per_m = 1.0;
  Pulse pulse;
  /// Nodes of the total-field box (both ends belong to it) and which of its six faces exist. A missing face
  /// means that the total field runs on to the wall or periodic side there.
  Index3 box_lo{};
  Index3 box_hi{};
  std::array<bool, 6> box_face{true, true, true, true, true, true};
};

/// Unit vector of propagation, and of E, of a plane wave.
Vec3 propagation_of(const PlaneWave& wave);
Vec3 e_direction_of(const PlaneWave& wave);

/// Point dipole. Electric: current moment I l [A m] times the pulse. Magnetic: K l [V m] times the pulse.
struct Dipole {
  bool is_magnetic = false;
  Vec3 position_m{};
  Vec3 moment{};
  Pulse pulse;
};

struct PointRequest {
  std::string name;
  Vec3 position_m{};
};

/// A plane (normal set, lo = hi along it) or a sub-volume (no normal), recorded every `every` steps, with
/// every `stride`-th lattice position kept along each axis.
struct SnapshotRequest {
  std::string name;
  std::optional<Axis> normal;
  Vec3 lo_m{};
  Vec3 hi_m{};
  std::vector<Component> components;
  long every = 1;
  int stride = 1;
};

struct AuditRequest {
  std::vector<double> frequencies_hz;  ///< empty: no audit
  std::array<bool, 6> faces{};
  int sample_every =
      0;  ///< steps; 0: as few samples as the pulse's spectrum allows (see recorders/audit.hpp)
};

struct Recording {
  std::vector<PointRequest> points;
  std::vector<SnapshotRequest> snapshots;
  AuditRequest audit;
  long energy_every = 50;  ///< steps
};

/// The run ends at the first of the two.
struct StopRule {
  double at_s = 0.0;
  /// Field energy in the clear volume, relative to its largest value so far [dB]. Not tested before the
  /// source has ended.
  std::optional<double> energy_below_db;
};

enum class Schedule { plain, fused, tiles };
std::string_view name_of(Schedule schedule);
/// The schedule of a name that name_of gives.
Schedule schedule_named(std::string_view name);

/// Sizes of a tile of the tiled schedule (solver/schedule.hpp). Tiles of one step gain nothing over the fused
/// sweep, which is then used.
struct TileShape {
  int x_rows = 16, y_rows = 16;  ///< cross-section
  int steps = 8;                 ///< that a tile is advanced at a time
  bool operator==(const TileShape&) const = default;
};
inline constexpr int most_tile_steps = 32;

struct Problem {
  Lattice lattice;
  Precision precision = Precision::single_precision;
  std::vector<Medium> media;  ///< at least one
  int background = 0;         ///< index into media
  std::vector<Object> objects;
  std::array<Face, 6> faces;  ///< indexed by Side
  std::optional<PlaneWave> plane_wave;
  std::vector<Dipole> dipoles;
  Recording recording;
  StopRule stop;
  Schedule schedule = Schedule::tiles;  ///< tiles become fused where x and y are both periodic
  std::optional<TileShape> tiles;       ///< none: found by trying while the run goes on
  int threads = 0;                      ///< 0: one per processor
  bool pin_threads = true;              ///< to processors, when there are as many threads as processors

  const Face& face(Side s) const { return faces[static_cast<std::size_t>(index_of(s))]; }
  long last_step() const;  ///< the step at which `stop.at_s` is reached
};

/// Whether a side's outer wall holds tangential E at zero: electric walls, and the back of absorbing layers.
bool wall_is_electric(const Problem& problem, Side side);

/// Thrown by everything that turns a problem into a run when the problem cannot be computed as asked. The
/// text says what is wrong, what is allowed and what to do next.
struct ProblemError : std::runtime_error {
  using std::runtime_error::runtime_error;
};

}  // namespace wanewall
