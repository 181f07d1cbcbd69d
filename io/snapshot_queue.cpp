#include "io/snapshot_queue.hpp"

#include <algorithm>
#include <chrono>
#include <stdexcept>
#include <utility>

#include "io/scene/snapshot_size.hpp"

namespace wanewall {
namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point start) {
  return std::chrono::duration<double>(Clock::now() - start).count();
}

std::size_t bytes_of(const Snapshot& snapshot) {
  std::size_t bytes = std::visit(
      [](const auto& values) { return values.capacity() * sizeof(values.front()); }, snapshot.values);
  for (const auto& positions : snapshot.positions_m) bytes += positions.capacity() * sizeof(double);
  return bytes;
}

}  // namespace

SnapshotQueue::SnapshotQueue(Sink& behind, std::size_t most_bytes)
    : behind_(behind), most_bytes_(most_bytes), thread_([this] { hand_on_all(); }) {}

SnapshotQueue::~SnapshotQueue() {
  {
    const std::lock_guard lock(mutex_);
    closed_ = dropped_ = true;
  }
  changed_.notify_all();
  if (thread_.joinable()) thread_.join();
}

void SnapshotQueue::take(Snapshot snapshot) {
  const std::size_t bytes = bytes_of(snapshot);
  std::unique_lock lock(mutex_);
  pass_failure_on();
  if (closed_) throw std::logic_error("a snapshot came after the queue was finished");
  const auto has_room = [&] { return failed_ || n_held_ < 2 || held_bytes_ + bytes <= most_bytes_; };
  if (!has_room()) {
    ++n_waits_;
    const auto start = Clock::now();
    changed_.wait(lock, has_room);
    waited_s_ += seconds_since(start);
    pass_failure_on();
  }
  waiting_.push_back(std::move(snapshot));
  ++n_held_;
  held_bytes_ += bytes;
  lock.unlock();
  changed_.notify_all();
}

void SnapshotQueue::finish() {
  {
    const std::lock_guard lock(mutex_);
    closed_ = true;
  }
  changed_.notify_all();
  const auto start = Clock::now();
  if (thread_.joinable()) thread_.join();
  const std::lock_guard lock(mutex_);
  waited_s_ += seconds_since(start);
  pass_failure_on();
}

void SnapshotQueue::hand_on_all() {
  std::unique_lock lock(mutex_);
  while (true) {
    changed_.wait(lock, [&] { return closed_ || !waiting_.empty(); });
    if (dropped_ || waiting_.empty()) return;
    Snapshot snapshot = std::move(waiting_.front());
    waiting_.pop_front();
    const std::size_t bytes = bytes_of(snapshot);
    lock.unlock();
    std::exception_ptr failure;
    try {
      behind_.take(std::move(snapshot));
    } catch (...) {
      failure = std::current_exception();
    }
    lock.lock();
    --n_held_;
    held_bytes_ -= bytes;
    if (failure) {
      failed_ = true;
      failure_ = failure;
      waiting_.clear();
      changed_.notify_all();
      return;
    }
    changed_.notify_all();
  }
}

void SnapshotQueue::pass_failure_on() {
  if (failure_) std::rethrow_exception(std::exchange(failure_, nullptr));
  if (failed_) throw std::logic_error("the snapshot queue ended with a failure before");
}

long SnapshotQueue::n_waits() const {
  const std::lock_guard lock(mutex_);
  return n_waits_;
}

double SnapshotQueue::waited_s() const {
  const std::lock_guard lock(mutex_);
  return waited_s_;
}

double snapshot_queue_bytes(const Problem& problem) {
  const auto value_bytes = static_cast<double>(bytes_of(problem.precision));
  double largest = 0.0;
  for (const SnapshotRequest& request : problem.recording.snapshots)
    for (Component c : request.components)
      largest = std::max(largest, value_bytes * scene::snapshot_values(problem, request, c));
  return std::min(value_bytes * scene::snapshot_values(problem),
                  std::max(static_cast<double>(SnapshotQueue::usual_bytes), 2.0 * largest));
}

}  // namespace wanewall
