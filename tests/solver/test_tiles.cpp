// The search for the tile shape, and tiles as a cover of rows and steps.
#include <catch2/catch.hpp>
#include <mutex>
#include <set>
#include <tuple>

#include "solver/tile_choice.hpp"
#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

RowGroups rows_of(std::vector<int> x_sizes, std::vector<int> y_sizes) {
  RowGroups rows;
  for (const int size : x_sizes) rows.i_begin.push_back(rows.i_begin.back() + size);
  for (const int size : y_sizes) rows.j_begin.push_back(rows.j_begin.back() + size);
  return rows;
}

/// Checks what schedule.hpp says must be kept, row by row.
class Watch : public RowWork {
 public:
  Watch(const RowGroups& rows, std::array<bool, 2> joined)
      : n_x(rows.i_begin.back()),
        n_y(rows.j_begin.back()),
        joined_(joined),
        e(static_cast<std::size_t>(n_x * n_y), 0),
        h(e) {}

  void advance_e(const RowBlock& block, long step, const Ahead&) override {
    const std::lock_guard lock(mutex_);
    for (int i = block.i0; i < block.i1; ++i)
      for (int j = block.j0; j < block.j1; ++j) {
        wrong += at(e, i, j) != step - 1;
        for (const auto& [a, b] : {std::pair{i, j}, {i - 1, j}, {i, j - 1}})
          if (const long* other = neighbour(h, a, b)) wrong += *other != step - 1;
        // Who still needs the E that goes?
        for (const auto& [a, b] : {std::pair{i - 1, j}, {i, j - 1}})
          if (const long* other = neighbour(h, a, b)) wrong += *other != step - 1;
      }
    for (int i = block.i0; i < block.i1; ++i)
      for (int j = block.j0; j < block.j1; ++j) at(e, i, j) = step;
  }
  void advance_h(const RowBlock& block, long step) override {
    const std::lock_guard lock(mutex_);
    for (int i = block.i0; i < block.i1; ++i)
      for (int j = block.j0; j < block.j1; ++j) {
        wrong += at(h, i, j) != step - 1;
        for (const auto& [a, b] : {std::pair{i, j}, {i + 1, j}, {i, j + 1}})
          if (const long* other = neighbour(e, a, b)) wrong += *other != step;
        at(h, i, j) = step;
      }
  }
  bool all_at(long step) const {
    return std::all_of(e.begin(), e.end(), [&](long s) { return s == step; }) &&
           std::all_of(h.begin(), h.end(), [&](long s) { return s == step; });
  }
  int n_x, n_y;
  long wrong = 0;

 private:
  long& at(std::vector<long>& of, int i, int j) { return of[static_cast<std::size_t>(i * n_y + j)]; }
  const long* neighbour(std::vector<long>& of, int i, int j) {
    if (joined_[0]) i = (i + n_x) % n_x;
    if (joined_[1]) j = (j + n_y) % n_y;
    return i < 0 || j < 0 || i >= n_x || j >= n_y ? nullptr : &at(of, i, j);
  }
  std::array<bool, 2> joined_;
  std::vector<long> e, h;
  std::mutex mutex_;
};

}  // namespace

TEST_CASE("Tiles keep the order that the lattice needs and reach every row at every step", "[tiles]") {
  const auto joined = GENERATE(std::array<bool, 2>{false, false}, std::array<bool, 2>{true, false},
                               std::array<bool, 2>{false, true});
  // Thick groups at both ends, as Moebius layers make them.
  std::vector<int> x_sizes(23, 1), y_sizes(17, 1);
  if (!joined[0]) x_sizes.front() = x_sizes.back() = 6;
  if (!joined[1]) y_sizes.back() = 9;
  const RowGroups rows = rows_of(x_sizes, y_sizes);
  for (const int threads : {1, 3}) {
    for (const TileShape shape :
         {TileShape{1, 1, 1}, {3, 5, 4}, {5, 3, 7}, {1, 8, 9}, {40, 2, 32}, {100, 100, 5}}) {
      TileSweep tiles(rows, joined, threads);
      Watch watch(rows, joined);
      long step = 1;
      for (const int n_steps : {shape.steps, 1, shape.steps}) {
        tiles.prepare(shape, step, n_steps);
#pragma omp parallel num_threads(threads)
        tiles.sweep(watch);
        step += n_steps;
        CAPTURE(threads, shape.x_rows, shape.y_rows, shape.steps, joined[0], joined[1]);
        REQUIRE(watch.wrong == 0);
        REQUIRE(watch.all_at(step - 1));
      }
    }
  }
}

TEST_CASE("The fastest tile shape is found, and a slow moment does not spoil it", "[tiles]") {
  const RowGroups rows = rows_of(std::vector<int>(200, 1), std::vector<int>(180, 1));
  TileChoice choice(rows, 10240, 2);
  std::set<std::tuple<int, int, int>> tried;
  int turns = 0;
  while (!choice.is_settled() && turns < 1000) {
    const TileShape shape = choice.next();
    tried.insert({shape.x_rows, shape.y_rows, shape.steps});
    // The best by far is 24 x 16 x 8; its first turn is slow.
    const bool best = shape == TileShape{24, 16, 8};
    const double per_step = best && tried.size() > 2 ? 0.01 : best ? 0.015 : 0.02;
    choice.took(shape.steps, per_step * shape.steps);
    ++turns;
  }
  CHECK(choice.is_settled());
  CHECK(tried.size() > 5);
  CHECK(choice.next() == TileShape{24, 16, 8});
  choice.took(8, 100.0);  // nothing is asked any more
  CHECK(choice.next() == TileShape{24, 16, 8});
}

TEST_CASE("Turns too short to be timed are put together", "[tiles]") {
  const RowGroups rows = rows_of(std::vector<int>(20, 1), std::vector<int>(20, 1));
  TileChoice choice(rows, 1024, 1);
  const TileShape first = choice.next();
  for (int n = 0; n < 50; ++n) {
    choice.took(8, 1e-5);
    CHECK(choice.next() == first);
  }
  CHECK_FALSE(choice.is_settled());
}

TEST_CASE("A given shape is taken as it is; tiles cannot follow two joined axes", "[tiles]") {
  CHECK(TileChoice(TileShape{3, 4, 5}).is_settled());
  CHECK(TileChoice(TileShape{3, 4, 5}).next() == TileShape{3, 4, 5});
  Problem p = vacuum_problem({8, 8, 8}, {1e-3, 1e-3, 1e-3});
  set_periodic(p, Axis::x);
  CHECK(TileSweep::is_possible(p.lattice));
  set_periodic(p, Axis::y);
  CHECK_FALSE(TileSweep::is_possible(p.lattice));
  set_courant(p, 0.9);
  CHECK(Marcher<float>(p, 1).schedule() == Schedule::fused);
}
