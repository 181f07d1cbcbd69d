// Recording beside the march.
#include <atomic>
#include <catch2/catch.hpp>
#include <chrono>
#include <functional>
#include <stdexcept>
#include <thread>

#include "io/snapshot_queue.hpp"

using namespace wanewall;

namespace {

constexpr std::size_t kilobyte = 1024;

Snapshot numbered(long step, std::size_t bytes = kilobyte) {
  Snapshot snapshot;
  snapshot.name = "plane";
  snapshot.step = step;
  snapshot.values = std::vector<float>(bytes / sizeof(float), static_cast<float>(step));
  return snapshot;
}

/// Keeps what it gets, after doing what the test wants.
struct TestSink : Sink {
  std::function<void(const Snapshot&)> before = [](const Snapshot&) {};
  std::vector<Snapshot> got;
  void take(Snapshot snapshot) override {
    before(snapshot);
    got.push_back(std::move(snapshot));
  }
};

/// Until something becomes true; only a broken queue lets it run out.
void wait_for(const std::function<bool()>& condition) {
  const auto end = std::chrono::steady_clock::now() + std::chrono::seconds(20);
  while (!condition()) {
    if (std::chrono::steady_clock::now() > end) throw std::runtime_error("waited in vain");
    std::this_thread::yield();
  }
}

}  // namespace

TEST_CASE("A queue hands on every snapshot, in order and unchanged", "[queue]") {
  TestSink sink;
  SnapshotQueue queue(sink, 4 * kilobyte);
  const std::thread::id here = std::this_thread::get_id();
  std::thread::id there;
  sink.before = [&](const Snapshot&) { there = std::this_thread::get_id(); };
  for (long n = 0; n < 500; ++n) queue.take(numbered(n));
  queue.finish();
  CHECK(there != here);
  REQUIRE(sink.got.size() == 500);
  for (long n = 0; n < 500; ++n) {
    const Snapshot& snapshot = sink.got[static_cast<std::size_t>(n)];
    CHECK(snapshot.step == n);
    CHECK(snapshot.name == "plane");
    CHECK(snapshot.values == numbered(n).values);
  }
  queue.finish();
  CHECK_THROWS_AS(queue.take(numbered(500)), std::logic_error);
  CHECK(sink.got.size() == 500);
}

TEST_CASE("A queue without snapshots ends at once", "[queue]") {
  TestSink sink;
  SnapshotQueue queue(sink);
  queue.finish();
  CHECK(sink.got.empty());
  CHECK(queue.n_waits() == 0);
}

TEST_CASE("A slow sink makes a full queue wait, and the wait is counted", "[queue]") {
  // Room for five snapshots of a kilobyte, and for two of any size.
  const std::size_t bytes = kilobyte * GENERATE(1U, 100U);
  const long room = bytes == kilobyte ? 5 : 2;
  TestSink sink;
  SnapshotQueue queue(sink, 5 * kilobyte + kilobyte / 2);
  std::atomic<long> n_taken{0}, most_held{0};
  sink.before = [&](const Snapshot& snapshot) {
    // Nothing is written until the other side has to wait: with room for everything it never would.
    if (snapshot.step == 0) wait_for([&] { return queue.n_waits() > 0; });
    most_held = std::max(most_held.load(), n_taken - snapshot.step);
  };
  for (long n = 0; n < 50; ++n) {
    queue.take(numbered(n, bytes));
    ++n_taken;
  }
  CHECK(queue.n_waits() >= 1);
  const double waited_in_take_s = queue.waited_s();
  CHECK(waited_in_take_s > 0.0);
  queue.finish();
  CHECK(queue.waited_s() >= waited_in_take_s);
  CHECK(most_held == room);
  CHECK(sink.got.size() == 50);
}

TEST_CASE("A queue with room does not wait", "[queue]") {
  TestSink sink;
  SnapshotQueue queue(sink, 100 * kilobyte);
  std::atomic<bool> all_taken{false};
  sink.before = [&](const Snapshot&) { wait_for([&] { return all_taken.load(); }); };
  for (long n = 0; n < 50; ++n) queue.take(numbered(n));
  CHECK(queue.n_waits() == 0);
  CHECK(sink.got.empty());
  all_taken = true;
  queue.finish();
  CHECK(sink.got.size() == 50);
}

TEST_CASE("What the sink throws comes out once, and nothing is written after it", "[queue]") {
  TestSink sink;
  std::atomic<bool> failed{false};
  sink.before = [&](const Snapshot& snapshot) {
    if (snapshot.step < 3) return;
    failed = true;
    throw std::domain_error("disk full");
  };
  SECTION("out of take") {
    SnapshotQueue queue(sink, kilobyte);
    long n = 0;
    const auto take_many = [&] {
      for (; n < 100; ++n) queue.take(numbered(n));
    };
    CHECK_THROWS_AS(take_many(), std::domain_error);
    CHECK(n >= 4);
    CHECK(n <= 6);  // two fit in: one thrown at, one behind it
    CHECK_THROWS_AS(queue.take(numbered(n)), std::logic_error);
    CHECK_THROWS_AS(queue.finish(), std::logic_error);
  }
  SECTION("out of a take that waits") {
    SnapshotQueue queue(sink, kilobyte);
    sink.before = [&](const Snapshot&) {
      wait_for([&] { return queue.n_waits() > 0; });
      throw std::domain_error("disk full");
    };
    queue.take(numbered(0));
    queue.take(numbered(1));
    CHECK_THROWS_WITH(queue.take(numbered(2)), "disk full");
    CHECK(queue.n_waits() == 1);
    CHECK(sink.got.empty());
    return;
  }
  SECTION("out of finish") {
    SnapshotQueue queue(sink);
    for (long n = 0; n < 4; ++n) queue.take(numbered(n));
    CHECK_THROWS_WITH(queue.finish(), "disk full");
    CHECK_THROWS_AS(queue.finish(), std::logic_error);
  }
  SECTION("nowhere, when the queue is given up") {
    SnapshotQueue queue(sink);
    for (long n = 0; n < 4; ++n) queue.take(numbered(n));
    wait_for([&] { return failed.load(); });
  }
  CHECK(sink.got.size() == 3);
}

TEST_CASE("A queue that is given up ends with the snapshot it is writing", "[queue]") {
  TestSink sink;
  std::atomic<bool> started{false}, go_on{false};
  sink.before = [&](const Snapshot&) {
    started = true;
    wait_for([&] { return go_on.load(); });
  };
  {
    SnapshotQueue queue(sink);
    for (long n = 0; n < 10; ++n) queue.take(numbered(n));
    wait_for([&] { return started.load(); });
    std::thread opener([&] { go_on = true; });
    opener.join();
  }
  CHECK(sink.got.size() >= 1);
  for (std::size_t n = 0; n < sink.got.size(); ++n) CHECK(sink.got[n].step == static_cast<long>(n));
}

TEST_CASE("The memory of a queue is all its snapshots, or what it holds at most", "[queue]") {
  Problem p;
  p.precision = Precision::double_precision;
  for (auto& lines : p.lattice.lines) lines = MeshLines::uniform(0.0, 1e-3, 300);
  p.lattice.dt_s = 1e-12;
  p.stop.at_s = 10e-12;
  CHECK(snapshot_queue_bytes(p) == 0.0);
  SnapshotRequest request;
  request.name = "cut";
  request.components = {Component::ez};
  request.normal = Axis::z;
  request.lo_m = {0.0, 0.0, 0.1};
  request.hi_m = {0.3, 0.3, 0.1};
  request.every = 5;
  p.recording.snapshots = {request};
  CHECK(snapshot_queue_bytes(p) == 3 * 8.0 * 301 * 301);  // steps 0, 5, 10
  request.normal.reset();
  request.lo_m[2] = 0.0;
  request.hi_m[2] = 0.3;
  p.recording.snapshots = {request};
  CHECK(snapshot_queue_bytes(p) == 2 * 8.0 * 301 * 301 * 300);  // two are more than the usual bytes
  request.stride = 2;
  request.every = 1;
  p.recording.snapshots = {request};
  CHECK(snapshot_queue_bytes(p) == 256.0 * 1024 * 1024);  // eleven of 27 MB
}
