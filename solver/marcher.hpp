// One run's state and what a row does at a step.
#pragma once

#include <memory>
#include <span>

#include "solver/fields.hpp"
#include "solver/illumination/dipole_rows.hpp"
#include "solver/illumination/total_field_surface.hpp"
#include "solver/media_rows.hpp"
#include "solver/problem.hpp"
#include "solver/recorders/captures.hpp"
#include "solver/recorders/recorder.hpp"
#include "solver/row_kernels.hpp"
#include "solver/schedule.hpp"
#include "solver/shell/moebius.hpp"
#include "solver/shell/one_way.hpp"
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
  /// Everything that the next step depends on beside step(), in a fixed order: fields, layer memory, the past
  /// of one-way walls.
  std::vector<std::span<Real>> state();
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

  void advance_e(const RowBlock& block) override;
  void advance_h(int i, int j) override;

  /// Bytes held, by kind.
  std::size_t field_bytes() const { return Fields<Real>::bytes(layout_); }
  std::size_t layer_bytes() const;
  std::size_t media_bytes() const { return e_media_.bytes() + h_media_.bytes(); }

 private:
  /// H differences of one row through the Moebius layers, first and second component of each axis; null
  /// outside them.
  struct Given {
    const Real* x = nullptr;
    const Real* y = nullptr;
  };
  void advance_e_row(int i, int j, const Given& given, std::ptrdiff_t ahead);
  void solve_columns(Axis axis, bool high, int across, Real* difference, std::ptrdiff_t difference_step);
  const MoebiusColumns<Real>& columns(Axis axis, bool high) const {
    return columns_[static_cast<std::size_t>(index_of(side_of(axis, high)))];
  }
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
  std::array<MoebiusColumns<Real>, 6> columns_;        // by Side
  std::array<std::vector<int>, 2> column_slot_;        // of nodes in Moebius layers along x and y, else -1
  std::array<std::array<ZWindow, 2>, 2> z_windows_{};  // [E, H][low, high]
  LayerMemory<Real> e_memory_, h_memory_, column_memory_;
  OneWayWalls<Real> one_way_;
  std::unique_ptr<TotalFieldSurface<Real>> surface_;
  DipoleRows<Real> dipoles_;
  bool surface_is_active_ = false;
  const Captures<Real>* captures_ = nullptr;
  RowGroups rows_;
  std::vector<int> slabs_;
  long step_ = 0;
  long moving_to_ = 0;  ///< the step being made
};

}  // namespace wanewall
