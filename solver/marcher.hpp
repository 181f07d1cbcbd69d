// One run's state and what a row does at a step.
#pragma once

#include <memory>

#include "solver/fields.hpp"
#include "solver/illumination/dipole_rows.hpp"
#include "solver/illumination/total_field_surface.hpp"
#include "solver/media_rows.hpp"
#include "solver/problem.hpp"
#include "solver/recorders/captures.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/row_kernels.hpp"
#include "solver/schedule.hpp"
#include "solver/shell/stretch.hpp"

namespace wanewall {

template <class Real>
class Marcher : public RowWork {
 public:
  /// Builds everything for a problem; fields are zero. Throws ProblemError. `threads` >= 1.
  Marcher(const Problem& problem, int threads, VectorCode code = best_vector_code());

  /// Captures take part in every step from now on; null: none.
  void attach(const Captures<Real>* captures) { captures_ = captures; }

  /// Advances from step() to step() + n, all recorders served. Starts the threads once.
  void advance(long n, const std::vector<Recorder*>& recorders);

  long step() const { return step_; }
  Fields<Real>& fields() { return fields_; }
  const Fields<Real>& fields() const { return fields_; }
  const MediaRows<Real>& e_media() const { return e_media_; }
  const MediaRows<Real>& h_media() const { return h_media_; }
  /// The plane wave's surface; null without one.
  const TotalFieldSurface<Real>* surface() const { return surface_.get(); }
  std::string_view vector_code() const { return kernels_.name; }
  int threads() const { return threads_; }

  /// Energy in the clear volume after the last step [J], see EnergySeries.
  double clear_energy_j() const;
  /// First component and cell that is not finite, as text; empty when all are.
  std::string find_not_finite() const;

  void advance_e(int i, int j) override;
  void advance_h(int i, int j) override;

  /// Bytes held, by kind.
  std::size_t field_bytes() const { return Fields<Real>::bytes(layout_); }
  std::size_t layer_bytes() const;
  std::size_t media_bytes() const { return e_media_.bytes() + h_media_.bytes(); }

 private:
  RowTask<Real> task(int i, int j, bool electric);
  void add_z_layers(const RowTask<Real>& t, const RowMedia<Real>& media, int i, int j, bool electric);
  void add_z_walls(const RowTask<Real>& t, const RowMedia<Real>& media);
  void hold_z_walls(const RowTask<Real>& t);
  const Real* mirrored(Component c, int i, int j, Real* scratch) const;
  FaceKind kind(Side s) const { return problem_.face(s).kind; }

  Problem problem_;
  RowLayout layout_;
  int threads_;
  const RowKernels<Real>& kernels_;
  Fields<Real> fields_;
  MediaRows<Real> e_media_, h_media_;
  std::array<Stretch<Real>, 3> e_stretch_, h_stretch_;
  int z_cells_lo_ = 0, z_cells_hi_ = 0;
  std::unique_ptr<LayerMemory<Real>> e_memory_, h_memory_;
  std::unique_ptr<TotalFieldSurface<Real>> surface_;
  DipoleRows<Real> dipoles_;
  bool surface_is_active_ = false;
  const Captures<Real>* captures_ = nullptr;
  RowExtent rows_;
  std::vector<int> slabs_;
  long step_ = 0;
};

}  // namespace wanewall
