// The shell audit: running DFT of the fields on planes in front of each face, over the whole cross-section.
//
// Samples are taken every Q steps. Q is the largest number for which no frequency above the pulse's end (1e-8
// of its peak) folds onto one below the audit's highest:  1/(Q dt) - f_audit >= f_end. Samples of a block are
// kept and added as one small matrix product, in double; the order of summation does not depend on the number
// of threads.
#pragma once

#include <complex>

#include "geometry/painter.hpp"
#include "solver/aligned_array.hpp"
#include "solver/recorders/captures.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/results.hpp"
#include "solver/table_kernels.hpp"

namespace wanewall {

/// Samples that are kept before they are added; there is room for those of one block of steps more.
inline constexpr std::size_t audit_block_samples = 16;
inline constexpr std::size_t audit_most_samples = audit_block_samples + most_tile_steps;
inline constexpr double audit_alias_level = 1e-8;

/// Q for a problem: as asked, or from the spectra of its pulses.
int audit_sample_every(const Problem& problem);

/// The planes that a problem's audit records on one face, without sums, and what the face's cross-section is
/// made of.
AuditFace audit_face(const Problem& problem, const Painter& painter, Side side);

template <class Real>
class AuditRecorder : public Recorder {
 public:
  AuditRecorder(const Problem& problem, Captures<Real>& captures);
  void before_block(const StepBlock& block) override;
  void after_block_shared(int thread, int threads) override;
  void after_block() override;
  AuditRecord finish();
  /// Bytes of buffers and sums.
  static double bytes(const Problem& problem);

 private:
  struct Plane {
    std::size_t face, plane;
    int capture;
    std::size_t size;
    AlignedArray<Real> block;   ///< [sample][position]
    AlignedArray<double> sums;  ///< see SampleBlock
    std::size_t n_groups() const { return (size + sum_group - 1) / sum_group; }
  };
  bool samples(long step) const { return step % record_.sample_every == 0; }
  /// Whether another block like the last would make more samples than are to be kept.
  bool is_full() const { return n_new_ > 0 && kept_steps_.size() + n_new_ > audit_block_samples; }
  std::size_t sums_per_group() const { return record_.frequencies_hz.size() * 2 * sum_group; }
  /// Adds what is kept to the sums of groups [begin, end) of a plane.
  void add_kept(Plane& plane, std::size_t begin, std::size_t end);

  AuditRecord record_;
  double dt_s_;
  Captures<Real>& captures_;
  AddSamples<Real> add_samples_ = add_samples<Real>(best_vector_code());
  std::vector<Plane> planes_;
  std::vector<long> kept_steps_;  ///< whose samples are kept and not yet added
  std::size_t n_new_ = 0;         ///< of them, taken in this block of steps
};

}  // namespace wanewall
