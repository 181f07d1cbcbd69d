#include <omp.h>

#include <algorithm>
#include <chrono>
#include <cmath>

#include "geometry/constants.hpp"
#include "solver/marcher.hpp"
#include "solver/recorders/audit.hpp"
#include "solver/recorders/points.hpp"
#include "solver/recorders/snapshots.hpp"
#include "solver/results.hpp"

namespace wanewall {
namespace {

using Clock = std::chrono::steady_clock;
double seconds_since(Clock::time_point start) {
  return std::chrono::duration<double>(Clock::now() - start).count();
}

/// Time after which no source drives the fields any more and the wave has had time to cross the clear volume.
double quiet_from_s(const Problem& problem) {
  double end = 0.0;
  if (problem.plane_wave) end = std::max(end, end_of_pulse_s(problem.plane_wave->pulse));
  for (const Dipole& dipole : problem.dipoles) end = std::max(end, end_of_pulse_s(dipole.pulse));
  double diagonal2 = 0.0;
  for (Axis a : all_axes) {
    const IndexRange clear = problem.lattice.clear_cells(a);
    const double d =
        problem.lattice.along(a).node_m(clear.end) - problem.lattice.along(a).node_m(clear.begin);
    diagonal2 += d * d;
  }
  return end + std::sqrt(diagonal2) / c0_m_per_s;
}

template <class Real>
RunResult run_as(const Problem& problem, Sink& sink, Monitor& monitor) {
  const auto start = Clock::now();
  const int threads = problem.threads > 0 ? problem.threads : omp_get_num_procs();
  Marcher<Real> marcher(problem, threads);
  Captures<Real> captures(problem.lattice);
  PointRecorder<Real> points(problem.lattice, problem.recording.points, captures);
  SnapshotRecorder<Real> snapshots(problem.lattice, problem.recording.snapshots, captures, sink);
  AuditRecorder<Real> audit(problem, captures);
  captures.freeze();
  marcher.attach(&captures);
  const std::vector<Recorder*> recorders{&points, &snapshots, &audit};

  RunResult result;
  result.threads = threads;
  result.vector_code = std::string(marcher.vector_code());
  result.build_seconds = seconds_since(start);

  const auto march_start = Clock::now();
  const long last = problem.last_step();
  const long every = std::max(1L, problem.recording.energy_every);
  const double quiet_s = quiet_from_s(problem);
  double peak_j = 0.0;
  Progress progress;
  progress.last_step = last;
  long chunk = 1;
  while (marcher.step() < last) {
    const long to_energy = every - marcher.step() % every;
    const auto chunk_start = Clock::now();
    const long n = std::min({std::max<long>(chunk, marcher.block_steps()), to_energy, last - marcher.step()});
    marcher.advance(n, recorders);
    // Long enough that starting the threads costs nothing, short enough that a stop is obeyed at once.
    const double chunk_s = seconds_since(chunk_start);
    chunk = chunk_s < 0.05 ? std::min(2 * n + 1, every) : std::max(1L, chunk / 2);
    progress.step = marcher.step();
    progress.seconds = seconds_since(march_start);
    progress.cells_per_second =
        problem.lattice.n_cells() * static_cast<double>(progress.step) / std::max(progress.seconds, 1e-9);

    if (marcher.step() % every == 0) {
      const double joule = marcher.clear_energy_j();
      result.energy.step.push_back(marcher.step());
      result.energy.joule.push_back(joule);
      if (!std::isfinite(joule)) {
        result.reason = StopReason::not_finite;
        result.not_finite_where = marcher.find_not_finite();
        break;
      }
      peak_j = std::max(peak_j, joule);
      progress.energy_db = peak_j > 0.0 ? 10.0 * std::log10(std::max(joule, 1e-300) / peak_j) : 0.0;
      const bool quiet = time_of_e_s(marcher.step(), problem.lattice.dt_s) > quiet_s;
      if (problem.stop.energy_below_db && quiet && peak_j > 0.0 &&
          progress.energy_db < *problem.stop.energy_below_db) {
        result.reason = StopReason::energy_fell;
        monitor.go_on(progress);
        break;
      }
    }
    if (!monitor.go_on(progress) && marcher.step() < last) {
      result.reason = StopReason::interrupted;
      break;
    }
  }
  result.schedule = marcher.schedule();
  result.tiles = marcher.tile_choice().next();
  result.tiles_are_settled = marcher.tile_choice().is_settled();
  result.steps = marcher.step();
  result.march_seconds = seconds_since(march_start);
  result.points = points.finish();
  result.audit = audit.finish();
  if (problem.plane_wave && marcher.surface()) {
    const PlaneWave& wave = *problem.plane_wave;
    for (double f : result.audit.frequencies_hz)
      result.audit.incident_v_s_per_m.push_back(wave.peak_v_per_m * spectrum(wave.pulse, 2.0 * pi * f));
    result.audit.incident_direction = propagation_of(wave);
    const WaveMedium& medium = marcher.surface()->medium();
    result.audit.incident_impedance_ohm =
        eta0_ohm * std::sqrt(medium.permeability_rel / medium.permittivity_rel);
  }
  return result;
}

template <class Real>
Footprint footprint_as(const Problem& problem) {
  const int threads = problem.threads > 0 ? problem.threads : omp_get_num_procs();
  const RowLayout layout = make_row_layout(problem.lattice, sizeof(Real));
  Footprint footprint;
  footprint.fields = static_cast<double>(Fields<Real>::bytes(layout));
  for (const LayerPart part : {LayerPart::cfs_e, LayerPart::h, LayerPart::moebius_e})
    footprint.layer_memory += static_cast<double>(
        LayerMemory<Real>::bytes(layout, layer_sizes(problem, part, layout, sizeof(Real))));
  footprint.layer_memory += static_cast<double>(OneWayWalls<Real>::bytes(problem, layout));
  for (const bool electric : {true, false})
    footprint.media += static_cast<double>(MediaRows<Real>(problem, layout, electric, threads).bytes());
  footprint.audit = AuditRecorder<Real>::bytes(problem);
  footprint.snapshots = SnapshotRecorder<Real>::bytes(problem.lattice, problem.recording.snapshots,
                                                      problem.tiles ? problem.tiles->steps : 16);
  const double rows = (layout.nx + 1.0) * (layout.ny + 1.0);
  const double steps = static_cast<double>(problem.last_step());
  footprint.other = 8.0 * rows + 8.0 * 6.0 * steps * static_cast<double>(problem.recording.points.size());
  for (const auto& face : problem.recording.audit.faces)
    if (face) footprint.other += 8.0 * 8.0 * rows;  // capture lists of a z face, the longest
  return footprint;
}

}  // namespace

RunResult run(const Problem& problem, Sink& sink, Monitor& monitor) {
  return problem.precision == Precision::single_precision ? run_as<float>(problem, sink, monitor)
                                                          : run_as<double>(problem, sink, monitor);
}

Footprint footprint_of(const Problem& problem) {
  return problem.precision == Precision::single_precision ? footprint_as<float>(problem)
                                                          : footprint_as<double>(problem);
}

}  // namespace wanewall
