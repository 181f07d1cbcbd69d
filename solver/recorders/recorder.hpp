// What every recorder does around a block of steps.
#pragma once

namespace wanewall {

/// Steps that are made together: first, first + 1, .. A step's slot is its place among them.
struct StepBlock {
  long first = 1;
  int n = 1;
  long end() const { return first + n; }
};

/// After a block, E is at its last step and H half a step later. Rows pass the steps of a block in any order,
/// so whatever is kept of a step must have room of its own.
class Recorder {
 public:
  virtual ~Recorder() = default;
  /// One thread, before the rows move: aim captures for each step of the block, or not.
  virtual void before_block(const StepBlock& block) = 0;
  /// All threads of the region, after all rows have moved; `thread` of `threads`. Heavy sums go here.
  virtual void after_block_shared(int /*thread*/, int /*threads*/) {}
  /// One thread, after that.
  virtual void after_block() = 0;
};

}  // namespace wanewall
