// Keeps a thread on one processor while it lives: rows that a core has in its caches are then met there
// again.
#pragma once

#include <sched.h>

namespace wanewall {

class PinnedThread {
 public:
  /// Thread `thread` of `threads`. Does nothing when the process may use more or fewer processors than there
  /// are threads: others may want the rest, or somebody has already decided.
  PinnedThread(int thread, int threads, bool wanted) {
    if (!wanted || threads < 2 || sched_getaffinity(0, sizeof before_, &before_) != 0) return;
    if (CPU_COUNT(&before_) != threads) return;
    cpu_set_t one;
    CPU_ZERO(&one);
    for (int cpu = 0, n = 0; cpu < CPU_SETSIZE; ++cpu)
      if (CPU_ISSET(cpu, &before_) && n++ == thread) CPU_SET(cpu, &one);
    is_pinned_ = sched_setaffinity(0, sizeof one, &one) == 0;
  }
  ~PinnedThread() {
    if (is_pinned_) sched_setaffinity(0, sizeof before_, &before_);
  }
  PinnedThread(const PinnedThread&) = delete;
  PinnedThread& operator=(const PinnedThread&) = delete;

 private:
  cpu_set_t before_;
  bool is_pinned_ = false;
};

}  // namespace wanewall
