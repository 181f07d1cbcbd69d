// Denormal numbers are slow and mean nothing here; a worker thread rounds them to zero while it marches.
#pragma once

#if defined(__SSE2__)
#include <immintrin.h>
#endif

namespace wanewall {

class FlushDenormals {
 public:
#if defined(__SSE2__)
  FlushDenormals() : before_(_mm_getcsr()) {
    _mm_setcsr(before_ | 0x8040u);
  }  // flush to zero, denormals are zero
  ~FlushDenormals() {
    _mm_setcsr(before_);
  }

 private:
  unsigned before_;
#else
  FlushDenormals() {}
  ~FlushDenormals() {}

 public:
#endif
  FlushDenormals(const FlushDenormals&) = delete;
  FlushDenormals& operator=(const FlushDenormals&) = delete;
};

}  // namespace wanewall
