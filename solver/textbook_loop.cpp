#include "solver/textbook_loop.hpp"

namespace wanewall {

TextbookLoop::TextbookLoop(int n, float courant_per_axis, int threads) : n_(n), threads_(threads) {
  const auto m = static_cast<std::size_t>(n + 1);
  for (std::size_t c = 0; c < 6; ++c) {
    fields_[c] = AlignedArray<float>(m * m * m);
    decay_[c] = AlignedArray<float>(m * m * m);
    gain_[c] = AlignedArray<float>(m * m * m);
  }
#pragma omp parallel for num_threads(threads_) schedule(static)
  for (int i = 0; i <= n; ++i)
    for (std::size_t c = 0; c < 6; ++c)
      for (std::size_t at = index(i, 0, 0); at < index(i, 0, 0) + m * m; ++at) {
        fields_[c][at] = 0.0f;
        decay_[c][at] = 1.0f;
        gain_[c][at] = courant_per_axis;
      }
}

void TextbookLoop::advance(int steps) {
  const int n = n_;
  const auto y = static_cast<std::ptrdiff_t>(n + 1), x = y * y;
  for (int s = 0; s < steps; ++s) {
#pragma omp parallel for num_threads(threads_) schedule(static)
    for (int i = 0; i <= n; ++i)
      for (int j = 0; j <= n; ++j) {
        const std::size_t row = index(i, j, 0);
        float *__restrict ex = fields_[0].data() + row, *__restrict ey = fields_[1].data() + row,
              *__restrict ez = fields_[2].data() + row;
        const float *hx = fields_[3].data() + row, *hy = fields_[4].data() + row,
                    *hz = fields_[5].data() + row;
        const float *ax = decay_[0].data() + row, *ay = decay_[1].data() + row, *az = decay_[2].data() + row;
        const float *bx = gain_[0].data() + row, *by = gain_[1].data() + row, *bz = gain_[2].data() + row;
        if (i < n && j > 0 && j < n)
          for (int k = 1; k < n; ++k)
            ex[k] = ax[k] * ex[k] + bx[k] * ((hz[k] - hz[k - y]) - (hy[k] - hy[k - 1]));
        if (i > 0 && i < n && j < n)
          for (int k = 1; k < n; ++k)
            ey[k] = ay[k] * ey[k] + by[k] * ((hx[k] - hx[k - 1]) - (hz[k] - hz[k - x]));
        if (i > 0 && i < n && j > 0 && j < n)
          for (int k = 0; k < n; ++k)
            ez[k] = az[k] * ez[k] + bz[k] * ((hy[k] - hy[k - x]) - (hx[k] - hx[k - y]));
      }
#pragma omp parallel for num_threads(threads_) schedule(static)
    for (int i = 0; i <= n; ++i)
      for (int j = 0; j <= n; ++j) {
        const std::size_t row = index(i, j, 0);
        const float *ex = fields_[0].data() + row, *ey = fields_[1].data() + row,
                    *ez = fields_[2].data() + row;
        float *__restrict hx = fields_[3].data() + row, *__restrict hy = fields_[4].data() + row,
              *__restrict hz = fields_[5].data() + row;
        const float *ax = decay_[3].data() + row, *ay = decay_[4].data() + row, *az = decay_[5].data() + row;
        const float *bx = gain_[3].data() + row, *by = gain_[4].data() + row, *bz = gain_[5].data() + row;
        if (j < n)
          for (int k = 0; k < n; ++k)
            hx[k] = ax[k] * hx[k] + bx[k] * ((ey[k + 1] - ey[k]) - (ez[k + y] - ez[k]));
        if (i < n)
          for (int k = 0; k < n; ++k)
            hy[k] = ay[k] * hy[k] + by[k] * ((ez[k + x] - ez[k]) - (ex[k + 1] - ex[k]));
        if (i < n && j < n)
          for (int k = 0; k <= n; ++k)
            hz[k] = az[k] * hz[k] + bz[k] * ((ex[k + y] - ex[k]) - (ey[k + x] - ey[k]));
      }
  }
}

}  // namespace wanewall
