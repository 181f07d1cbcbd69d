// What every recorder does around a step.
#pragma once

namespace wanewall {

/// E is at `step` and H at step + 1/2 once the step is done.
class Recorder {
 public:
  virtual ~Recorder() = default;
  /// One thread, before the rows move: aim captures, or not.
  virtual void before_step(long step) = 0;
  /// All threads of the region, after all rows have moved; `thread` of `threads`. Heavy sums go here.
  virtual void after_step_shared(long /*step*/, int /*thread*/, int /*threads*/) {}
  /// One thread, after that.
  virtual void after_step(long step) = 0;
};

}  // namespace wanewall
