// A sink that lets a run go on while its snapshots are written.
#pragma once

#include <condition_variable>
#include <cstddef>
#include <deque>
#include <exception>
#include <mutex>
#include <thread>

#include "solver/results.hpp"

namespace wanewall {

/// Hands snapshots on to another sink in a thread of its own, in the order in which they came. From its
/// construction until finish() has returned nobody else may use what the other sink writes with.
///
/// What the other sink throws comes out of the next take() or finish(), once; what was still waiting is
/// dropped, and every later call throws std::logic_error.
class SnapshotQueue : public Sink {
 public:
  /// Snapshots that are held at once may take so many bytes; two are held whatever their size.
  static constexpr std::size_t usual_bytes = std::size_t{256} << 20;

  /// Keeps a reference: `behind` must outlive the queue.
  explicit SnapshotQueue(Sink& behind, std::size_t most_bytes = usual_bytes);
  /// Without finish(), drops what is still waiting; the snapshot that is being written is written to its end.
  ~SnapshotQueue() override;
  SnapshotQueue(const SnapshotQueue&) = delete;
  SnapshotQueue& operator=(const SnapshotQueue&) = delete;

  /// Waits only while there is no room. From one thread at a time.
  void take(Snapshot snapshot) override;
  /// Waits until all is handed on and ends the thread. Takes nothing afterwards; a second call does nothing.
  void finish();

  /// How often take() had to wait, and how long take() and finish() waited together [s].
  long n_waits() const;
  double waited_s() const;

 private:
  void hand_on_all();
  void pass_failure_on();

  Sink& behind_;
  const std::size_t most_bytes_;
  mutable std::mutex mutex_;  // guards everything below but the thread
  std::condition_variable changed_;
  std::deque<Snapshot> waiting_;
  std::size_t n_held_ = 0, held_bytes_ = 0;  // waiting or being written
  bool closed_ = false, dropped_ = false, failed_ = false;
  std::exception_ptr failure_;  // until it is passed on
  long n_waits_ = 0;
  double waited_s_ = 0.0;
  std::thread thread_;
};

/// Memory that a queue of the usual size holds at most while a problem runs [bytes].
double snapshot_queue_bytes(const Problem& problem);

}  // namespace wanewall
