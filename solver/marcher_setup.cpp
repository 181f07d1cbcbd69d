// Building a marcher: what each row is, before any moves.
#include <omp.h>

#include <algorithm>

#include "solver/marcher.hpp"

namespace wanewall {
namespace {

template <class Real>
std::array<Stretch<Real>, 3> make_stretches(const Problem& problem, const RowLayout& layout, bool electric) {
  return {make_stretch<Real>(problem, Axis::x, electric, layout.nx + 1),
          make_stretch<Real>(problem, Axis::y, electric, layout.ny + 1),
          make_stretch<Real>(problem, Axis::z, electric, static_cast<int>(layout.row))};
}

int n_rows(const Lattice& lattice, Axis a) {
  return lattice.cells(a) + (lattice.periodic[static_cast<std::size_t>(index_of(a))] ? 0 : 1);
}

/// Rows along an axis in groups: the nodes of a Moebius layer together, those on and next to a one_way wall
/// together, all others alone.
std::vector<int> group_rows(const Problem& problem, Axis axis) {
  const int n = problem.lattice.cells(axis), rows = n_rows(problem.lattice, axis);
  const auto cells = [&](bool high) {
    const Face& face = problem.face(side_of(axis, high));
    return face.kind == FaceKind::moebius ? face.cells() : 0;
  };
  const auto is_one_way = [&](bool high) {
    return problem.face(side_of(axis, high)).kind == FaceKind::one_way;
  };
  const int lo_end = cells(false) + 1, hi_begin = n - cells(true);
  std::vector<int> begin{0};
  for (int index = 1; index < rows; ++index) {
    const bool first_of_lo = index == 1 && !is_one_way(false);
    const bool between = index > 1 && index >= lo_end && index <= hi_begin && index < n;
    const bool on_hi = index == n && n > 1 && !is_one_way(true);
    if (first_of_lo || between || on_hi) begin.push_back(index);
  }
  begin.push_back(rows);
  return begin;
}

std::vector<int> make_column_slots(const Problem& problem, Axis axis) {
  const int n = problem.lattice.cells(axis);
  std::vector<int> slots(static_cast<std::size_t>(n) + 1, -1);
  int next = 0;
  for (const bool high : {false, true}) {
    const Face& face = problem.face(side_of(axis, high));
    if (face.kind != FaceKind::moebius) continue;
    const int cells = face.cells();
    for (int d = 0; d < cells; ++d) slots[static_cast<std::size_t>(high ? n - cells + d : 1 + d)] = next++;
  }
  return slots;
}

const Problem& checked(const Problem& problem) {
  check_moebius_faces(problem);
  return problem;
}

}  // namespace

template <class Real>
Marcher<Real>::Marcher(const Problem& problem, int threads, VectorCode code)
    : problem_(checked(problem)),
      layout_(make_row_layout(problem.lattice, sizeof(Real))),
      threads_(threads),
      kernels_(row_kernels<Real>(code)),
      fields_(layout_),
      e_media_(problem, layout_, true, threads),
      h_media_(problem, layout_, false, threads),
      e_stretch_(make_stretches<Real>(problem, layout_, true)),
      h_stretch_(make_stretches<Real>(problem, layout_, false)),
      column_slot_{make_column_slots(problem, Axis::x), make_column_slots(problem, Axis::y)},
      e_memory_(layout_, layer_sizes(problem, LayerPart::cfs_e, layout_, sizeof(Real))),
      h_memory_(layout_, layer_sizes(problem, LayerPart::h, layout_, sizeof(Real))),
      column_memory_(layout_, layer_sizes(problem, LayerPart::moebius_e, layout_, sizeof(Real))),
      one_way_(problem_, layout_, e_media_, h_media_),
      dipoles_(problem, e_media_, h_media_),
      rows_{group_rows(problem, Axis::x), group_rows(problem, Axis::y),
            rows_per_band(static_cast<std::size_t>(layout_.row) * sizeof(Real))},
      slabs_(deal_groups(rows_.i_begin, threads)),
      choice_(TileShape{}),
      tiles_(rows_, {problem.lattice.periodic[0], problem.lattice.periodic[1]}, threads) {
  for (Side side : all_sides)
    columns_[static_cast<std::size_t>(index_of(side))] = MoebiusColumns<Real>(problem_, side, layout_);
  make_z_parts();
  use(problem_.schedule, problem_.tiles);
  if (problem_.plane_wave) surface_ = std::make_unique<TotalFieldSurface<Real>>(problem_, e_media_, h_media_);
  make_places();
  make_extras();
#pragma omp parallel num_threads(threads_)
  {
    // The thread that works on a plane is the first to touch it. Rows past the last moving one belong to the
    // last.
    const auto t = static_cast<std::size_t>(omp_get_thread_num());
    const auto plane = [&](std::size_t slab) {
      return rows_.i_begin[static_cast<std::size_t>(slabs_[slab])];
    };
    const int lo = plane(t), hi = t + 1 == static_cast<std::size_t>(threads_) ? layout_.nx + 1 : plane(t + 1);
    fields_.zero_planes(lo, hi);
    e_memory_.zero_planes(lo, hi, e_stretch_[0].slot);
    h_memory_.zero_planes(lo, hi, h_stretch_[0].slot);
    column_memory_.zero_planes(lo, hi, column_slot_[0]);
  }
}

template <class Real>
void Marcher<Real>::use(Schedule schedule, const std::optional<TileShape>& tiles) {
  const bool untiled = schedule == Schedule::tiles && !TileSweep::is_possible(problem_.lattice);
  schedule_ = untiled ? Schedule::fused : schedule;
  if (schedule_ == Schedule::tiles && !tiles)
    choice_ = TileChoice(rows_, 6 * static_cast<std::size_t>(layout_.row) * sizeof(Real), threads_);
  else
    choice_ = TileChoice(tiles.value_or(TileShape{}));
}

template <class Real>
void Marcher<Real>::attach(Captures<Real>* captures) {
  captures_ = captures;
  make_extras();
}

template <class Real>
void Marcher<Real>::make_places() {
  for (const bool high : {false, true}) {
    const Side side = side_of(Axis::z, high);
    z_wall_is_electric_[high ? 1 : 0] = wall_is_electric(problem_, side);
    z_walls_reach_beyond_ =
        z_walls_reach_beyond_ || kind(side) == FaceKind::magnetic_wall || kind(side) == FaceKind::periodic;
  }
  for (const bool electric : {true, false}) {
    const auto& stretch = electric ? e_stretch_ : h_stretch_;
    for (const Axis axis : {Axis::x, Axis::y}) {
      const auto a = static_cast<std::size_t>(index_of(axis));
      const int n = problem_.lattice.cells(axis);
      const bool joined = problem_.lattice.periodic[a];
      // Beyond an electric wall there is no neighbour; the row itself stands in, since nothing that reads it
      // moves.
      const auto neighbour = [&](int index) {
        if (electric) return index > 0 ? index - 1 : joined ? n - 1 : 0;
        return index < n - 1 ? index + 1 : index == n - 1 && joined ? 0 : n;
      };
      std::vector<Place>& places = places_[electric ? 0 : 1][a];
      for (int index = 0; index <= n; ++index) {
        const auto at = static_cast<std::size_t>(index);
        Place place;
        place.beside = (neighbour(index) - index) * (axis == Axis::x ? layout_.plane : layout_.row);
        place.inv = stretch[a].inv[at];
        place.slot = stretch[a].slot[at];
        if (place.slot >= 0) {
          place.b = stretch[a].b[at];
          place.c = stretch[a].c[at];
          place.late = stretch[a].late[at] != 0;
        }
        // Mirrored neighbours of magnetic walls are put into the task itself, and no row may inherit them.
        place.follows = index > 1 && index < n && place.slot < 0 && places.back().slot < 0 &&
                        place.beside == places.back().beside;
        places.push_back(place);
      }
    }
  }
  const auto n_rows_y = static_cast<std::size_t>(rows_.j_begin.back());
  j_run_end_.assign(n_rows_y, 0);
  j_group_end_.assign(n_rows_y, 0);
  for (int b = rows_.n_j(); b-- > 0;) {
    const int begin = rows_.j_begin[static_cast<std::size_t>(b)],
              end = rows_.j_begin[static_cast<std::size_t>(b) + 1];
    const auto at = static_cast<std::size_t>(begin);
    j_group_end_[at] = end;
    const bool single = end - begin == 1 && column_slot_[1][at] < 0;
    const bool goes_on = single && end < rows_.j_begin.back() && j_run_end_[at + 1] > end;
    j_run_end_[at] = !single ? begin : goes_on ? j_run_end_[at + 1] : end;
  }
}

template <class Real>
void Marcher<Real>::make_extras() {
  for (const bool electric : {true, false}) {
    std::vector<unsigned char>& extras = extras_[electric ? 0 : 1];
    extras.assign(static_cast<std::size_t>(layout_.nx + 1) * static_cast<std::size_t>(layout_.ny + 1), 0);
    std::size_t row = 0;
    for (int i = 0; i <= layout_.nx; ++i) {
      for (int j = 0; j <= layout_.ny; ++j, ++row) {
        unsigned extra = 0;
        if (surface_ && (electric ? surface_->touches_e(i, j) : surface_->touches_h(i, j)))
          extra |= on_surface;
        if (dipoles_.touches(i, j)) extra |= has_dipole;
        if (captures_ && captures_->touches(electric, i, j)) extra |= is_captured;
        const auto magnetic_at = [&](Axis a, int index, int n) {
          return (index == 0 && kind(side_of(a, false)) == FaceKind::magnetic_wall) ||
                 (index == n && kind(side_of(a, true)) == FaceKind::magnetic_wall);
        };
        if (electric && (magnetic_at(Axis::x, i, layout_.nx) || magnetic_at(Axis::y, j, layout_.ny)))
          extra |= has_mirror;
        extras[row] = static_cast<unsigned char>(extra);
      }
    }
  }
}

/// The parts of rows inside z layers, ready but for what differs from row to row.
template <class Real>
void Marcher<Real>::make_z_parts() {
  for (const bool electric : {true, false}) {
    for (const bool high : {false, true}) {
      const Side side = side_of(Axis::z, high);
      const ZWindow window = z_window(problem_, side, electric, layout_, sizeof(Real));
      if (window.length == 0) continue;
      ZPart part;
      part.length = window.length;
      if (electric && kind(side) == FaceKind::moebius) {
        part.moebius = columns(Axis::z, high).z_task();
        part.moebius.ahead = column_memory_.z_values();
        part.is_moebius_e = true;
      } else {
        const Stretch<Real>& stretch = (electric ? e_stretch_ : h_stretch_)[2];
        part.layer.begin = window.begin;
        part.layer.n = window.length;
        part.layer.b = stretch.b.data() + window.begin;
        part.layer.c = stretch.c.data() + window.begin;
        part.layer.ahead = (electric ? e_memory_ : h_memory_).z_values();
        part.kernel = electric                          ? kernels_.z_layer_e
                      : kind(side) == FaceKind::moebius ? kernels_.z_layer_h_late
                                                        : kernels_.z_layer_h;
      }
      z_parts_[electric ? 0 : 1].push_back(part);
    }
  }
}

template Marcher<float>::Marcher(const Problem&, int, VectorCode);
template void Marcher<float>::use(Schedule, const std::optional<TileShape>&);
template void Marcher<float>::attach(Captures<float>*);
template Marcher<double>::Marcher(const Problem&, int, VectorCode);
template void Marcher<double>::use(Schedule, const std::optional<TileShape>&);
template void Marcher<double>::attach(Captures<double>*);

}  // namespace wanewall
