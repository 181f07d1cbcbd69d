// One-way walls: tangential E on the outermost nodes follows the wave that leaves.
//
// Node 0 lies on the wall, node 1 is the next inside. With a, g and the differences D as in
// one_way_reflection (lattice_reflection.hpp),
//   order 1   E0(n+1) = E1(n) + a [E1(n+1) - E0(n)]
//   order 2   E0(n+1) = -E1(n-1) + a [E1(n+1) + E0(n-1)] + (1 - a) [E0(n) + E1(n)] + g D [E0(n) + E1(n)]
// Beside electric and magnetic walls D uses the mirror image, on periodic axes the other side; beside another
// one-way wall, order 1 is taken. Where two such walls meet, the x wall decides before the y wall and that
// before the z wall.
//   Source: G. Mur, IEEE Trans. Electromagn. Compat. 23, 377 (1981).
#pragma once

#include <array>
#include <span>
#include <vector>

#include "solver/fields.hpp"
#include "solver/media_rows.hpp"
#include "solver/problem.hpp"

namespace wanewall {

template <class Real>
class OneWayWalls {
 public:
  /// Throws ProblemError where the lattice has fewer than three cells along a wall's normal.
  OneWayWalls(const Problem& problem, const RowLayout& layout, const MediaRows<Real>& e_media,
              const MediaRows<Real>& h_media);

  bool empty() const { return walls_.empty(); }
  bool has(Side side) const;
  /// The last thing that happens to an E row at a step: sets what lies on walls, keeps what they will need.
  /// The row next to a wall must come before the row on it.
  void finish_row(int i, int j, long step, Fields<Real>& fields);
  /// The past of all walls.
  void append_state(std::vector<std::span<Real>>& state);
  static std::size_t bytes(const Problem& problem, const RowLayout& layout);

 private:
  /// Values of both tangential components on nodes 0 and 1, three steps of them. Across x and y walls entries
  /// are whole rows, across z walls single values.
  struct Wall {
    Side side;
    int order;
    double spacing_m;
    std::array<int, 2> component;            ///< 0, 1, 2: tangential E in the order x, y, z
    std::array<int, 2> extent;               ///< rows along the wall (x: 1, j; y: i, 1; z: i, j)
    int length;                              ///< values per entry
    std::array<std::vector<Real>, 2> a, g;   ///< [component][entry][value]; g < 0: the value stays zero
    std::array<std::vector<Real>, 12> past;  ///< [step % 3][component][node]
  };
  /// An index beside another along an axis and the sign of its value; sign 0: there is none.
  struct Beside {
    int index;
    int sign;
  };
  Beside beside(Axis axis, bool half, int index, int step) const;
  void add_wall(Side side, const MediaRows<Real>& e_media, const MediaRows<Real>& h_media);
  static std::size_t slot(long step, int component, int node) {
    return static_cast<std::size_t>((step + 3) % 3 * 4 + component * 2 + node);
  }
  void move(Wall& wall, int component, int i, int j, long step, Real* row);

  const Problem& problem_;
  RowLayout layout_;
  std::vector<Wall> walls_;
};

}  // namespace wanewall
