// What edges and faces are made of.
#include <catch2/catch.hpp>

#include "geometry/painter.hpp"
#include "tests/geometry/random_scene.hpp"
#include "tests/geometry/slow_painter.hpp"

using namespace wanewall;

namespace {

struct Canvas {
  Lattice lattice;
  std::vector<Medium> media{{"vacuum", 1.0, 1.0, 0.0, 0.0, false, false},
                            {"glass", 5.0, 2.0, 0.4, 6.0, false, false},
                            {"metal", 1.0, 1.0, 0.0, 0.0, true, false},
                            {"magnetic", 1.0, 1.0, 0.0, 0.0, false, true}};
  std::vector<Object> objects;

  Canvas() {
    for (auto& lines : lattice.lines) lines = MeshLines::uniform(0.0, 1.0, 10);
  }
  Paint at(Component c, Index3 where) const {
    std::vector<Paint> row;
    Painter(lattice, media, objects, 0).row(c, where[0], where[1], row);
    return row[static_cast<std::size_t>(where[2])];
  }
};

/// Count of perfect edges of one component.
int n_perfect(const Canvas& canvas, Component c) {
  const Painter painter(canvas.lattice, canvas.media, canvas.objects, 0);
  std::vector<Paint> row;
  int n = 0;
  for (int i = 0; i < canvas.lattice.stored(c, Axis::x).end; ++i)
    for (int j = 0; j < canvas.lattice.stored(c, Axis::y).end; ++j) {
      painter.row(c, i, j, row);
      for (const Paint& paint : row) n += paint.perfect;
    }
  return n;
}

}  // namespace

TEST_CASE("An interface on a mesh plane: tangential E takes the mean, normal E its own side", "[painter]") {
  const Axis normal = GENERATE(Axis::x, Axis::y, Axis::z);
  Canvas canvas;
  canvas.objects.push_back({HalfSpace{normal, 4.0, true}, 1, "half"});
  Index3 on{5, 5, 5};
  on[static_cast<std::size_t>(index_of(normal))] = 4;
  Index3 below = on;
  below[static_cast<std::size_t>(index_of(normal))] = 3;
  for (Axis along : all_axes) {
    const Paint paint = canvas.at(electric(along), on);
    CAPTURE(name_of(normal), name_of(along));
    if (along == normal) {
      CHECK(paint == Paint{1.0, 0.0, false});
      CHECK(canvas.at(electric(along), below) == Paint{5.0, 0.4, false});
    } else {
      CHECK(paint.relative == Approx(3.0));
      CHECK(paint.loss == Approx(0.2));
    }
  }
  // Normal H lies on the plane's nodes along the normal: series mean of mu = 1 and 2 is 4/3.
  CHECK(canvas.at(magnetic(normal), on).relative == Approx(4.0 / 3.0));
  // Tangential H lies half a cell away.
  CHECK(canvas.at(magnetic(next(normal)), on).relative == 1.0);
  CHECK(canvas.at(magnetic(next(normal)), below) == Paint{2.0, 6.0, false});
}

TEST_CASE("An interface in the middle of a cell: normal E takes the series mean", "[painter]") {
  const Axis normal = GENERATE(Axis::x, Axis::y, Axis::z);
  Canvas canvas;
  canvas.objects.push_back({HalfSpace{normal, 4.5, true}, 1, "half"});
  Index3 at{5, 5, 5};
  at[static_cast<std::size_t>(index_of(normal))] = 4;
  const Paint paint = canvas.at(electric(normal), at);
  CHECK(paint.relative == Approx(2.0 * 5.0 / 6.0));
  CHECK(paint.loss == Approx(paint.relative * paint.relative * 0.5 * 0.4 / 25.0));
}

TEST_CASE("A metal box holds the edges on its own surface", "[painter]") {
  Canvas canvas;
  canvas.objects.push_back({Box{{2.0, 3.0, 4.0}, {5.0, 5.0, 7.0}, {0, 0, 1}, 0.0}, 2, "box"});
  // 3 x 2 x 3 cells: along each axis cells x (nodes) x (nodes).
  CHECK(n_perfect(canvas, Component::ex) == 3 * 3 * 4);
  CHECK(n_perfect(canvas, Component::ey) == 4 * 2 * 4);
  CHECK(n_perfect(canvas, Component::ez) == 4 * 3 * 3);
  CHECK(n_perfect(canvas, Component::hx) == 0);
  // A later object covers an earlier one.
  canvas.objects.push_back({Box{{2.0, 3.0, 4.0}, {5.0, 5.0, 7.0}, {0, 0, 1}, 0.0}, 1, "cover"});
  CHECK(n_perfect(canvas, Component::ex) == 0);
}

TEST_CASE("A sheet without thickness on a mesh plane is a conductor on that plane only", "[painter]") {
  Canvas canvas;
  canvas.objects.push_back({Box{{2.0, 2.0, 5.0}, {6.0, 6.0, 5.0}, {0, 0, 1}, 0.0}, 2, "sheet"});
  CHECK(n_perfect(canvas, Component::ex) == 4 * 5);
  CHECK(n_perfect(canvas, Component::ey) == 5 * 4);
  CHECK(n_perfect(canvas, Component::ez) == 0);
}

TEST_CASE("A perfect magnetic conductor holds faces, not edges", "[painter]") {
  Canvas canvas;
  canvas.objects.push_back({Box{{2.0, 2.0, 2.0}, {4.0, 4.0, 4.0}, {0, 0, 1}, 0.0}, 3, "block"});
  CHECK(n_perfect(canvas, Component::hx) == 3 * 2 * 2);
  CHECK(n_perfect(canvas, Component::ex) == 0);
}

TEST_CASE("Shapes know where a vertical line runs in them", "[shapes]") {
  const double tol = 1e-9;
  const auto length = [&](const Shape& s, double x, double y) {
    const Interval i = z_interval(s, x, y, tol);
    return i.empty() ? 0.0 : i.hi_m - i.lo_m;
  };
  CHECK(length(Sphere{{1, 2, 3}, 2.0}, 1.0, 2.0) == Approx(4.0));
  CHECK(length(Sphere{{1, 2, 3}, 2.0}, 1.0, 3.2) == Approx(2.0 * std::sqrt(4.0 - 1.44)));
  CHECK(length(Sphere{{1, 2, 3}, 2.0}, 1.0, 4.1) == 0.0);
  // An upright, a lying and a leaning cylinder of radius 1.
  CHECK(length(Cylinder{{0, 0, 1}, {0, 0, 5}, 1.0}, 0.3, 0.4) == Approx(4.0));
  CHECK(length(Cylinder{{0, 0, 1}, {0, 0, 5}, 1.0}, 0.9, 0.9) == 0.0);
  CHECK(length(Cylinder{{-3, 0, 1}, {3, 0, 1}, 1.0}, 2.0, 0.6) == Approx(1.6));
  CHECK(length(Cylinder{{-3, 0, 1}, {3, 0, 1}, 1.0}, 3.5, 0.0) == 0.0);
  // At 45 degrees the vertical chord through the axis is 2 r / sin 45.
  CHECK(length(Cylinder{{-9, 0, -9}, {9, 0, 9}, 1.0}, 0.0, 0.0) == Approx(2.0 * std::sqrt(2.0)));
  CHECK(length(Box{{0, 0, 0}, {2, 3, 4}, {0, 0, 1}, 0.0}, 1.0, 1.0) == Approx(4.0));
  // A thin plate turned by 30 degrees about y: its vertical chord is t / cos 30.
  const Box plate{{-5, -5, -0.1}, {5, 5, 0.1}, {0, 1, 0}, 0.5235987755982988};
  CHECK(length(plate, 0.0, 0.0) == Approx(0.2 / std::cos(0.5235987755982988)));
  // ... and a right-handed turn about y lifts the -x side.
  CHECK(z_interval(Shape{plate}, -2.0, 0.0, tol).lo_m > 0.5);
  const Bounds bounds = bounds_of(Cylinder{{-9, 0, -9}, {9, 0, 9}, 1.0});
  CHECK(bounds.lo_m[0] == Approx(-9.0 - std::sqrt(0.5)));
  CHECK(bounds.hi_m[1] == Approx(1.0));
}

TEST_CASE("The medium at a point", "[painter]") {
  Canvas canvas;
  canvas.objects.push_back({HalfSpace{Axis::z, 4.0, true}, 1, "half"});
  canvas.objects.push_back({Sphere{{5, 5, 4}, 1.0}, 2, "ball"});
  const Painter painter(canvas.lattice, canvas.media, canvas.objects, 0);
  CHECK(painter.medium_at({5, 5, 8}) == 0);
  CHECK(painter.medium_at({1, 1, 2}) == 1);
  CHECK(painter.medium_at({5, 5, 4.9}) == 2);
  CHECK(painter.medium_at({5, 5, 5.0}) == 2);
}

TEST_CASE("Rows are what their edges and faces are one by one, to the last bit", "[painter]") {
  const bool curved = GENERATE(false, true);
  long n_equal = 0, n_runs = 0, n_unlike = 0;
  for (unsigned seed = 0; seed < 30; ++seed) {
    test::RandomScene random(seed);
    const Lattice lattice = random.lattice({9, 8, 70});
    const std::vector<Medium> media = test::RandomScene::media();
    const std::vector<Object> objects = random.objects(lattice, 1 + static_cast<int>(seed % 7), curved);
    const Painter painter(lattice, media, objects, 1), other(lattice, media, {}, 0);
    const test::SlowPainter slow{lattice, media, objects, 1};
    for (Component c : all_components) {
      const IndexRange all = lattice.stored(c, Axis::z), part{static_cast<int>(seed), 40};
      std::vector<Paint> row, before, piece, unpainted;
      std::vector<PaintRun> runs;
      for (int i = 0; i < lattice.stored(c, Axis::x).end; ++i) {
        for (int j = 0; j < lattice.stored(c, Axis::y).end; ++j) {
          CAPTURE(seed, name_of(c), i, j);
          before = row;
          painter.row(c, i, j, row);
          std::vector<Paint> wanted;
          for (int k = 0; k < all.end; ++k) wanted.push_back(slow.at(c, {i, j, k}));
          REQUIRE(row == wanted);
          other.row(c, i, j, unpainted);  // what a thread remembers of one painter is not another's
          REQUIRE(unpainted == std::vector<Paint>(wanted.size(), Paint{}));
          painter.row(c, i, j, part, piece);
          REQUIRE(
              std::equal(piece.begin(), piece.end(), wanted.begin() + part.begin, wanted.begin() + part.end));
          painter.runs(c, i, j, part, runs);
          REQUIRE(runs.front().begin == part.begin);
          REQUIRE(runs.back().end == part.end);
          for (std::size_t r = 0; r < runs.size(); ++r) {
            REQUIRE(runs[r].paint == wanted[static_cast<std::size_t>(runs[r].begin)]);
            if (r == 0) continue;
            REQUIRE(runs[r - 1].end == runs[r].begin);
            REQUIRE(!(runs[r - 1].paint == runs[r].paint));
          }
          n_runs += static_cast<long>(runs.size());
          if (j == 0) continue;
          if (painter.surely_equal(c, i, j, i, j - 1)) {
            REQUIRE(row == before);
            ++n_equal;
          } else if (row != before) {
            ++n_unlike;
          }
        }
      }
    }
  }
  // The scenes have something in them, and not the same everywhere.
  CHECK(n_runs > 15'000);
  CHECK(n_equal > 1000);
  CHECK(n_unlike > 1000);
}

TEST_CASE("A painter does not take rows from one that stood in the same place", "[painter]") {
  Canvas canvas;
  canvas.objects.push_back({Layer{Axis::z, 2.0, 5.0}, 0, "layer"});
  for (int n = 0; n < 50; ++n) {
    canvas.objects[0].medium = n % 2;
    CHECK(canvas.at(Component::ez, {4, 4, 3}).relative == (n % 2 == 0 ? 1.0 : 5.0));
  }
}

TEST_CASE("Blocks are the shapes that every line crosses alike", "[shapes]") {
  CHECK(is_block(Box{{0, 0, 0}, {2, 3, 4}, {0, 0, 1}, 0.0}));
  CHECK_FALSE(is_block(Box{{0, 0, 0}, {2, 3, 4}, {0, 0, 1}, 0.1}));
  CHECK(is_block(Layer{Axis::x, 1.0, 2.0}));
  CHECK(is_block(HalfSpace{Axis::y, 1.0, true}));
  CHECK_FALSE(is_block(Sphere{{0, 0, 0}, 1.0}));
  CHECK_FALSE(is_block(Cylinder{{0, 0, 0}, {0, 0, 1}, 1.0}));
}
