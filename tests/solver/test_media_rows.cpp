// Update coefficients of whole rows.
#include <catch2/catch.hpp>

#include "geometry/constants.hpp"
#include "setup.hpp"
#include "solver/media_rows.hpp"
#include "tests/geometry/random_scene.hpp"
#include "tests/geometry/slow_painter.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

/// Loss rate that matched slabs add at a component's own depth [1/s]; `depth` counts half cells from the
/// shell's first node outwards.
double slab_rate(const Problem& problem, Component c, Axis a, int index) {
  const int here = 2 * index + (is_half(c, a) ? 1 : 0);
  double sigma = 0.0;
  for (const bool high : {false, true}) {
    const Face& face = problem.face(side_of(a, high));
    if (face.kind != FaceKind::matched_slab) continue;
    const int first = 2 * problem.lattice.clear_node(side_of(a, high));
    const int depth = high ? here - first : first - here;
    if (depth < 0 || depth >= 2 * face.layer.cells()) continue;
    const auto d = static_cast<std::size_t>(depth / 2);
    sigma += depth % 2 == 0 ? face.layer.sigma_e_s_per_m[d] : face.layer.sigma_h_s_per_m[d];
  }
  return sigma / eps0_f_per_m;
}

/// Images on joined sides, and E in an electric wall, do not move.
bool is_still(const Problem& problem, Component c, Axis a, int index) {
  if (is_half(c, a)) return index >= problem.lattice.cells(a);
  const bool last = index == problem.lattice.cells(a);
  if (problem.lattice.periodic[static_cast<std::size_t>(index_of(a))]) return last;
  if (!is_electric(c)) return false;
  return (index == 0 && wall_is_electric(problem, side_of(a, false))) ||
         (last && wall_is_electric(problem, side_of(a, true)));
}

LayerTable slab(int cells, double sigma) {
  LayerTable layer;
  for (int d = 0; d < cells; ++d) {
    layer.sigma_e_s_per_m.push_back(sigma * d);
    layer.sigma_h_s_per_m.push_back(sigma * (d + 0.5));
  }
  layer.kappa_e.assign(static_cast<std::size_t>(cells), 1.0);
  layer.kappa_h = layer.kappa_e;
  layer.alpha_e_s_per_m.assign(static_cast<std::size_t>(cells), 0.0);
  layer.alpha_h_s_per_m = layer.alpha_e_s_per_m;
  return layer;
}

}  // namespace

TEST_CASE("Every row has the coefficients of its edges and faces, to the last bit", "[media]") {
  const int kind = GENERATE(0, 1, 2);  // walls; slabs on five sides; joined sides
  std::size_t n_shared = 0;
  for (unsigned seed = 0; seed < 6; ++seed) {
    RandomScene random(seed);
    Problem p;
    p.precision = Precision::double_precision;
    p.lattice = random.lattice({11, 9, 40});
    p.media = RandomScene::media();
    p.objects = random.objects(p.lattice, 1 + static_cast<int>(seed), seed % 2 == 1);
    p.background = 2;
    for (Side side : all_sides) set_face(p, side, FaceKind::electric_wall);
    if (kind == 1) {
      for (Side side : all_sides)
        if (side != Side::y_hi)
          set_face(p, side, FaceKind::matched_slab, slab(3, 0.1 + 0.01 * index_of(side)));
    } else if (kind == 2) {
      set_periodic(p, Axis::y);
      set_face(p, Side::x_lo, FaceKind::magnetic_wall);
    }
    const RowLayout layout = make_row_layout(p.lattice, sizeof(double));
    const SlowPainter slow{p.lattice, p.media, p.objects, p.background};
    for (const bool electric : {true, false}) {
      const MediaRows<double> media(p, layout, electric, 2);
      for (int i = 0; i <= layout.nx; ++i) {
        for (int j = 0; j <= layout.ny; ++j) {
          if (j > 0 && &media.row(i, j) == &media.row(i, j - 1)) ++n_shared;
          for (int n = 0; n < 3; ++n) {
            const Component c = electric ? wanewall::electric(all_axes[static_cast<std::size_t>(n)])
                                         : magnetic(all_axes[static_cast<std::size_t>(n)]);
            std::vector<double> wanted, found;
            for (int k = 0; k <= p.lattice.cells(Axis::z); ++k) {
              // Tangential E on the low wall is held at zero after the update.
              if (electric && n < 2 && k == 0) continue;
              UpdateCoefficients one;
              const bool still =
                  is_still(p, c, Axis::x, i) || is_still(p, c, Axis::y, j) || is_still(p, c, Axis::z, k);
              if (!still) {
                const Paint paint = slow.at(c, {i, j, k});
                const double vacuum = electric ? eps0_f_per_m : mu0_h_per_m;
                const double rate = paint.loss / (vacuum * paint.relative) +
                                    (slab_rate(p, c, Axis::x, i) + slab_rate(p, c, Axis::y, j)) +
                                    slab_rate(p, c, Axis::z, k);
                if (!paint.perfect) one = update_coefficients(paint.relative, rate, p.lattice.dt_s);
              }
              const UpdateCoefficients stored = media.row(i, j).at(n, k);
              wanted.insert(wanted.end(), {one.decay, one.gain});
              found.insert(found.end(), {stored.decay, stored.gain});
            }
            CAPTURE(seed, kind, name_of(c), i, j);
            REQUIRE(found == wanted);
          }
        }
      }
    }
  }
  CHECK(n_shared > 100);
}
