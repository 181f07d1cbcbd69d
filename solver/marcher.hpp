// One run's state and what a row does at a step.
#pragma once

#include <memory>
#include <span>

#include "solver/field_survey.hpp"
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
#include "solver/tile_choice.hpp"

namespace wanewall {

template <class Real>
class Marcher : public RowWork {
 public:
  /// Builds everything for a problem; fields are zero. Throws ProblemError. `threads` >= 1.
  Marcher(const Problem& problem, int threads, VectorCode code = best_vector_code());

  /// Captures take part in every step from now on; null: none.
  void attach(Captures<Real>* captures);

  /// Advances from step() to step() + n, all recorders served. Starts the threads once.
  void advance(long n, const std::vector<Recorder*>& recorders);
  /// Steps that are made together when as many are asked for.
  int block_steps() const { return schedule() == Schedule::tiles ? choice_.next().steps : 8; }
  /// What is really used: fused where tiles were asked for and cannot be, or are of one step.
  Schedule schedule() const {
    return schedule_ == Schedule::tiles && choice_.next().steps == 1 ? Schedule::fused : schedule_;
  }
  const TileChoice& tile_choice() const { return choice_; }

  long step() const { return step_; }
  /// Goes on from another step; what the fields are then is the caller's affair.
  void set_step(long step) { step_ = step; }
  /// Changes the schedule from the next advance() on, as Problem's schedule and tiles would have it.
  void use(Schedule schedule, const std::optional<TileShape>& tiles);
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
  double clear_energy_j() const {
    return wanewall::clear_energy_j(problem_.lattice, fields_, e_media_, h_media_, threads_);
  }
  /// First component and cell that is not finite, as text; empty when all are.
  std::string find_not_finite() const { return wanewall::find_not_finite(fields_); }

  void advance_e(const RowBlock& block, long step, const Ahead& ahead) override;
  void advance_h(const RowBlock& block, long step) override;

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
  /// What a row's index along x or y means for its update.
  struct Place {
    std::ptrdiff_t beside = 0;  ///< from the row to the neighbour that its curl reads
    Real inv = 0, b = 0, c = 0;
    bool late = false;
    int slot = -1;
    bool follows = false;  ///< along y: the task differs from that of the row before only in where it points
  };
  /// What a row has to do beside its curl and its layers.
  enum Extra : unsigned char { on_surface = 1, has_dipole = 2, is_captured = 4, has_mirror = 8 };

  /// What a z layer does to a row.
  struct ZPart {
    int length = 0;
    bool is_moebius_e = false;
    ZMoebiusTask<Real> moebius;
    ZLayerTask<Real> layer;
    void (*kernel)(const RowTask<Real>&, const ZLayerTask<Real>&) = nullptr;
  };

  void make_z_parts();
  void make_places();
  void make_extras();
  void advance_e_group(const RowBlock& block, int slot, const Ahead& ahead);
  void advance_e_row(int i, int j, int slot, const Given& given, const Ahead& ahead);
  const typename TotalFieldSurface<Real>::ZFaceLines& surface_lines(bool electric, int i, int j, int j_end,
                                                                    int slot, bool& is_sampled) const;
  void mirror_h(int i, int j, RowTask<Real>& t);
  void solve_columns(Axis axis, bool high, int across, Real* difference, std::ptrdiff_t difference_step);
  const MoebiusColumns<Real>& columns(Axis axis, bool high) const {
    return columns_[static_cast<std::size_t>(index_of(side_of(axis, high)))];
  }
  void fill_task(int i, int j, bool electric, RowTask<Real>& t);
  void step_task(int i, int j, bool electric, RowTask<Real>& t);
  void set_ahead(const Ahead& ahead, RowTask<Real>& t) const;
  void advance_e_task(int i, int j, int j_end, int slot, RowTask<Real>& t, bool& is_sampled);
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
  std::array<MoebiusColumns<Real>, 6> columns_;  // by Side
  std::array<std::vector<int>, 2> column_slot_;  // of nodes in Moebius layers along x and y, else -1
  std::array<std::vector<ZPart>, 2> z_parts_;    // [E, H], low side first
  LayerMemory<Real> e_memory_, h_memory_, column_memory_;
  OneWayWalls<Real> one_way_;
  std::unique_ptr<TotalFieldSurface<Real>> surface_;
  DipoleRows<Real> dipoles_;
  Captures<Real>* captures_ = nullptr;
  std::array<std::array<std::vector<Place>, 2>, 2> places_;  // [E, H][x, y]
  std::array<std::vector<unsigned char>, 2> extras_;         // [E, H][row]: of Extra
  std::array<bool, 2> z_wall_is_electric_{};                 // [low, high]
  bool z_walls_reach_beyond_ = false;                        ///< magnetic or periodic
  std::vector<int> j_run_end_;  // of single rows outside Moebius layers from j on; j itself when it is none
  std::vector<int> j_group_end_;
  RowGroups rows_;
  std::vector<int> slabs_;
  Schedule schedule_ = Schedule::fused;
  TileChoice choice_;
  TileSweep tiles_;
  StepBlock block_;  ///< being made
  long step_ = 0;
};

}  // namespace wanewall
