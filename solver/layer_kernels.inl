// Included by row_kernels.inl, within its vector namespace.

/// Ex gains -psi of dHy/dz, Ey gains +psi of dHx/dz.
template <class Real>
void z_layer_e(const RowTask<Real>& t, const ZLayerTask<Real>& z) {
  const Real* __restrict hx = t.other[0] + z.begin, * __restrict hy = t.other[1] + z.begin;
  Real* __restrict ex = t.own[0] + z.begin, * __restrict ey = t.own[1] + z.begin;
  Real* __restrict psi_x = z.psi_x, * __restrict psi_y = z.psi_y;
  const Real* __restrict b = z.b, * __restrict c = z.c, * __restrict gain_x = z.gain_x, * __restrict gain_y = z.gain_y;
#pragma omp simd
  for (int m = 0; m < z.n; ++m) {
    const Real memory_x = b[m] * psi_x[m] + c[m] * (hy[m] - hy[m - 1]);
    const Real memory_y = b[m] * psi_y[m] + c[m] * (hx[m] - hx[m - 1]);
    psi_x[m] = memory_x;
    psi_y[m] = memory_y;
    ex[m] -= gain_x[m] * memory_x;
    ey[m] += gain_y[m] * memory_y;
  }
}

/// Hx gains +psi of dEy/dz, Hy gains -psi of dEx/dz. A Moebius layer's psi acts before it takes in the new
/// difference.
template <class Real, bool late>
void z_layer_h(const RowTask<Real>& t, const ZLayerTask<Real>& z) {
  const Real* __restrict ex = t.other[0] + z.begin, * __restrict ey = t.other[1] + z.begin;
  Real* __restrict hx = t.own[0] + z.begin, * __restrict hy = t.own[1] + z.begin;
  Real* __restrict psi_x = z.psi_x, * __restrict psi_y = z.psi_y;
  const Real* __restrict b = z.b, * __restrict c = z.c, * __restrict gain_x = z.gain_x, * __restrict gain_y = z.gain_y;
#pragma omp simd
  for (int m = 0; m < z.n; ++m) {
    const Real old_x = psi_x[m], old_y = psi_y[m];
    const Real memory_x = b[m] * old_x + c[m] * (ey[m + 1] - ey[m]);
    const Real memory_y = b[m] * old_y + c[m] * (ex[m + 1] - ex[m]);
    psi_x[m] = memory_x;
    psi_y[m] = memory_y;
    hx[m] += gain_x[m] * (late ? old_x : memory_x);
    hy[m] -= gain_y[m] * (late ? old_y : memory_y);
  }
}

/// One forward and one backward sweep over the layer per vector of k; both components at once, since each
/// sweep waits for itself.
template <class Real>
void moebius_columns(const ColumnTask<Real>& t) {
  using V = Vector<Real>;
  const MoebiusNumbers<Real>& number = t.numbers;
  const Real quarter = Real(0.25);
  typename V::Aligned forward[most_moebius_cells][2];
  for (std::ptrdiff_t k = 0; k < t.row; k += V::width) {
    typename V::Aligned sum[2]{}, before[2]{};
    for (int j = 0; j < t.cells; ++j) {
      for (int c = 0; c < 2; ++c) {
        const Real* h = t.h[c] + j * t.h_step + k;
        const Real* memory = t.memory[c] + j * t.memory_step + k;
        const auto a = V::load(memory), d = V::load(memory + t.row);
        const auto f = (a - d) + sum[c];
        sum[c] = a + d;
        const auto rest = (V::load(h) - V::load(h - t.h_minus)) - quarter * f;
        before[c] = rest - number.lower[j] * before[c];
        forward[j][c] = before[c];
      }
    }
    typename V::Aligned outer[2]{};
    for (int j = t.cells - 1; j >= 0; --j) {
      for (int c = 0; c < 2; ++c) {
        Real* memory = t.memory[c] + j * t.memory_step + k;
        const auto g = number.inv_diagonal[j] * forward[j][c] - number.lower[j + 1] * outer[c];
        V::store(memory, number.b[j] * V::load(memory) + number.r[j] * (g + outer[c]));
        V::store(memory + t.row,
                 number.b_inverse[j] * V::load(memory + t.row) + number.r_inverse[j] * (outer[c] - g));
        V::store(t.difference[c] + j * t.difference_step + k, g);
        outer[c] = g;
      }
    }
  }
}

/// One component of z_moebius_e: own += sign gain inv_z (M^-1 df - df).
template <class Real>
inline void z_moebius_component(Real* own, const Real* h, const Real* inv_z, const Real* gain, Real sign, Real* memory_a,
                                Real* memory_d, const ZMoebiusTask<Real>& z) {
  constexpr int width = moebius_block_bytes / static_cast<int>(sizeof(Real));
  typedef Real Block __attribute__((vector_size(moebius_block_bytes), aligned(sizeof(Real)), may_alias));
  constexpr int most = (most_moebius_cells + width - 1) / width;
  const auto load = [](const Real* p) { return *reinterpret_cast<const Block*>(p); };
  const auto store = [](Real* p, Block v) { *reinterpret_cast<Block*>(p) = v; };
  const int blocks = z.n / width, outwards = z.outwards_is_up ? 1 : -1;
  // Room for one neighbour at both ends, which is zero.
  alignas(64) Real shifted[(most + 2) * width];
  alignas(64) Real rest[most * width];
  Block df[most], g[most];
  Real* const inside = shifted + width;
  store(shifted, Block{});
  store(inside + z.n, Block{});
  for (int v = 0; v < blocks; ++v)
    store(inside + v * width, load(memory_a + v * width) + load(memory_d + v * width));
  if (z.fits) {
    for (int v = 0; v < blocks; ++v) df[v] = load(h + v * width) - load(h + v * width - 1);
  } else {
    Real* values = reinterpret_cast<Real*>(df);
    for (int m = 0; m < z.n; ++m) values[m] = m >= z.first && m < z.last ? h[m] - h[m - 1] : Real(0);
  }
  for (int v = 0; v < blocks; ++v) {
    const Block f = (load(memory_a + v * width) - load(memory_d + v * width)) + load(inside + v * width - outwards);
    store(rest + v * width, df[v] - Real(0.25) * f);
    g[v] = Block{};
  }
  for (int source = z.first; source < z.last; ++source)
    for (int v = 0; v < blocks; ++v) g[v] += rest[source] * load(z.dense + source * z.n + v * width);
  for (int v = 0; v < blocks; ++v) store(inside + v * width, g[v]);
  for (int v = 0; v < blocks; ++v) {
    const Block outer = load(inside + v * width + outwards);
    const auto at = [&](const Real* numbers) { return load(numbers + v * width); };
    store(memory_a + v * width, at(z.numbers.b) * at(memory_a) + at(z.numbers.r) * (g[v] + outer));
    store(memory_d + v * width, at(z.numbers.b_inverse) * at(memory_d) + at(z.numbers.r_inverse) * (outer - g[v]));
  }
  if (z.fits) {
    for (int v = 0; v < blocks; ++v) {
      Real* out = own + v * width;
      store(out, load(out) + sign * load(gain + v * width) * load(inv_z + v * width) * (g[v] - df[v]));
    }
  } else {
    const Real *solved = reinterpret_cast<const Real*>(g), *plain = reinterpret_cast<const Real*>(df);
    for (int m = z.first; m < z.last; ++m) own[m] += sign * gain[m] * inv_z[m] * (solved[m] - plain[m]);
  }
}

/// Ex has -dHy/dz, Ey has +dHx/dz.
template <class Real>
void z_moebius_e(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  __builtin_prefetch(z.memory + z.ahead, 1);
  __builtin_prefetch(z.memory + z.ahead + 2 * z.n, 1);
  z_moebius_component<Real>(t.own[0] + z.begin, t.other[1] + z.begin, t.inv_z + z.begin, z.gain_x, Real(-1), z.memory,
                            z.memory + z.n, z);
  z_moebius_component<Real>(t.own[1] + z.begin, t.other[0] + z.begin, t.inv_z + z.begin, z.gain_y, Real(1),
                            z.memory + 2 * z.n, z.memory + 3 * z.n, z);
}
