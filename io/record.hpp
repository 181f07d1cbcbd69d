// The record of a run: one HDF5 file, openPMD 1.1.0 for the mesh fields, our own groups beside them.
#pragma once

#include <array>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "io/scene.hpp"
#include "solver/results.hpp"

namespace wanewall {

struct Provenance {
  std::string program_version, build_type, compiler, processor, host_system;
  std::string started_utc, ended_utc;  ///< "YYYY-MM-DD HH:mm:ss +0000"
  int threads = 0;
  std::string vector_code, schedule;
  /// How long the run waited for its snapshots to be written [s]; empty when it had none.
  std::optional<double> disk_wait_s{};
  /// For a witness run: the record that it checks, the faces whose layers were exchanged, and for what. Else
  /// empty.
  std::string witness_of{}, witness_faces{}, witness_layer{};
};

/// Writes a record beside its final name and gives it that name only when it is whole. A writer that is
/// destroyed before finish() removes its unfinished file. All failures throw FileError.
class RecordWriter : public Sink {
 public:
  RecordWriter(const std::string& path, const Scene& scene);
  ~RecordWriter() override;
  RecordWriter(const RecordWriter&) = delete;
  RecordWriter& operator=(const RecordWriter&) = delete;

  void take(Snapshot snapshot) override;
  /// Adds the run's series, audit and provenance, closes, syncs and renames. With `xdmf`, also writes path +
  /// ".xdmf".
  void finish(const RunResult& result, const Provenance& provenance, bool xdmf);

 private:
  struct State;
  std::unique_ptr<State> state_;
};

/// Where a recorded snapshot component lives in time and space.
struct SnapshotList {
  std::string name;
  Component component = Component::ex;
  std::vector<long> steps;
  std::vector<double> times_s;
  std::array<std::vector<double>, 3> positions_m;
};

/// Whether to load the planes of the shell audit, which can be large.
enum class AuditPlanes { load, leave };

/// A record read back. The light parts are loaded at once, snapshots on demand.
class Record {
 public:
  /// Throws FileError when the file is missing, not a record, of a newer layout, or damaged. With
  /// AuditPlanes::leave, the planes of result.audit have no sums.
  explicit Record(const std::string& path, AuditPlanes audit_planes = AuditPlanes::load);
  ~Record();
  Record(const Record&) = delete;
  Record& operator=(const Record&) = delete;

  std::string title, scene_text;
  std::vector<UsedValue> used;
  double band_lo_hz = 0.0, band_hi_hz = 0.0;
  Provenance provenance;
  Lattice lattice;
  Precision precision = Precision::single_precision;
  RunResult result;
  std::vector<SnapshotList> snapshots;

  /// One recorded step of one snapshot component.
  Snapshot load(const SnapshotList& list, std::size_t which) const;
  /// Its values at the points [begin, end) only, index order [x][y][z]; V/m or A/m.
  std::vector<double> load_part(const SnapshotList& list, std::size_t which, const Index3& begin,
                                const Index3& end) const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace wanewall
