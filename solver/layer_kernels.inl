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

/// Hx gains +psi of dEy/dz, Hy gains -psi of dEx/dz.
template <class Real>
void z_layer_h(const RowTask<Real>& t, const ZLayerTask<Real>& z) {
  const Real* __restrict ex = t.other[0] + z.begin, * __restrict ey = t.other[1] + z.begin;
  Real* __restrict hx = t.own[0] + z.begin, * __restrict hy = t.own[1] + z.begin;
  Real* __restrict psi_x = z.psi_x, * __restrict psi_y = z.psi_y;
  const Real* __restrict b = z.b, * __restrict c = z.c, * __restrict gain_x = z.gain_x, * __restrict gain_y = z.gain_y;
#pragma omp simd
  for (int m = 0; m < z.n; ++m) {
    const Real memory_x = b[m] * psi_x[m] + c[m] * (ey[m + 1] - ey[m]);
    const Real memory_y = b[m] * psi_y[m] + c[m] * (ex[m + 1] - ex[m]);
    psi_x[m] = memory_x;
    psi_y[m] = memory_y;
    hx[m] += gain_x[m] * memory_x;
    hy[m] -= gain_y[m] * memory_y;
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
        __builtin_prefetch(h + t.h_ahead);
        __builtin_prefetch(memory + t.memory_ahead, 1);
        __builtin_prefetch(memory + t.memory_ahead + t.row, 1);
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

/// Vectors for the z parts of Moebius layers, which are short: whole lines where the code has such vectors and
/// the window is a multiple of them, else half lines.
template <class Real, int bytes>
struct Block {
  static constexpr int width = bytes / static_cast<int>(sizeof(Real));
  typedef Real Any __attribute__((vector_size(bytes), aligned(sizeof(Real)), may_alias));
  static Any load(const Real* p) { return *reinterpret_cast<const Any*>(p); }
  static void store(Real* p, Any v) { *reinterpret_cast<Any*>(p) = v; }
  /// Entry m of the result is entry m + 1 (up) or m - 1 of the row whose blocks are here and its neighbours.
  template <bool up>
  static Any neighbour(Any before, Any here, Any after) {
    return shift<up>(before, here, after, std::make_integer_sequence<int, width>());
  }

 private:
  template <bool up, int... m>
  static Any shift(Any before, Any here, Any after, std::integer_sequence<int, m...>) {
    if constexpr (up)
      return __builtin_shufflevector(here, after, (m + 1)...);
    else
      return __builtin_shufflevector(before, here, (m + width - 1)...);
  }
};

/// own += sign gain inv_z (M^-1 df - df) for both components; `n_blocks` blocks, or as many as the task says
/// when zero. Ex has -dHy/dz, Ey has +dHx/dz.
template <class Real, int bytes, bool up, int n_blocks>
void z_moebius_blocks(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  using B = Block<Real, bytes>;
  using Any = typename B::Any;
  constexpr int width = B::width;
  constexpr int most = n_blocks > 0 ? n_blocks : (most_moebius_cells + width - 1) / width;
  const int blocks = n_blocks > 0 ? n_blocks : z.n / width;
  Real* const own[2]{t.own[0] + z.begin, t.own[1] + z.begin};
  const Real* const h[2]{t.other[1] + z.begin, t.other[0] + z.begin};
  const Real* const gain[2]{z.gain_x, z.gain_y};
  alignas(64) Real rest[2][most * width];
  Any df[2][most], g[2][most], odd[2][most];
  for (int c = 0; c < 2; ++c) {
    const Real *a = z.memory + 2 * c * z.n, *d = a + z.n;
    if (z.fits) {
      for (int v = 0; v < blocks; ++v)
        df[c][v] = B::load(h[c] + v * width) - B::load(h[c] + v * width - 1);
    } else {
      alignas(64) Real values[most * width]{};
      for (int m = z.first; m < z.last; ++m) values[m] = h[c][m] - h[c][m - 1];
      for (int v = 0; v < blocks; ++v) df[c][v] = B::load(values + v * width);
    }
    Any sum[most + 2];  // A + D with nothing at both ends
    sum[0] = sum[blocks + 1] = Any{};
    for (int v = 0; v < blocks; ++v) sum[v + 1] = B::load(a + v * width) + B::load(d + v * width);
    for (int v = 0; v < blocks; ++v) {
      const Any inner = B::template neighbour<!up>(sum[v], sum[v + 1], sum[v + 2]);
      const Any f = (B::load(a + v * width) - B::load(d + v * width)) + inner;
      B::store(rest[c] + v * width, df[c][v] - Real(0.25) * f);
      g[c][v] = odd[c][v] = Any{};
    }
  }
  // Two sums, so that one addition need not wait for the last.
  const auto add = [&](int source, Any(&sum)[2][most]) {
    const Real x = rest[0][source], y = rest[1][source];
    for (int v = 0; v < blocks; ++v) {
      const Any column = B::load(z.dense + source * z.n + v * width);
      sum[0][v] += x * column;
      sum[1][v] += y * column;
    }
  };
  int source = z.first;
  for (; source + 1 < z.last; source += 2) {
    add(source, g);
    add(source + 1, odd);
  }
  if (source < z.last) add(source, g);
  for (int c = 0; c < 2; ++c)
    for (int v = 0; v < blocks; ++v) g[c][v] += odd[c][v];
  for (int c = 0; c < 2; ++c) {
    Real *a = z.memory + 2 * c * z.n, *d = a + z.n;
    const Real sign = c == 0 ? Real(-1) : Real(1);
    for (int v = 0; v < blocks; ++v) {
      const Any before = v > 0 ? g[c][v - 1] : Any{}, after = v + 1 < blocks ? g[c][v + 1] : Any{};
      const Any outer = B::template neighbour<up>(before, g[c][v], after);
      const auto at = [&](const Real* numbers) { return B::load(numbers + v * width); };
      B::store(a + v * width, at(z.numbers.b) * at(a) + at(z.numbers.r) * (g[c][v] + outer));
      B::store(d + v * width, at(z.numbers.b_inverse) * at(d) + at(z.numbers.r_inverse) * (outer - g[c][v]));
    }
    if (z.fits) {
      for (int v = 0; v < blocks; ++v) {
        const Any change = B::load(gain[c] + v * width) * B::load(t.inv_z + z.begin + v * width) * (g[c][v] - df[c][v]);
        B::store(own[c] + v * width, B::load(own[c] + v * width) + sign * change);
      }
    } else {
      for (int m = z.first; m < z.last; ++m) {
        const Real change = gain[c][m] * t.inv_z[z.begin + m] * (g[c][m / width][m % width] - df[c][m / width][m % width]);
        own[c][m] += sign * change;
      }
    }
  }
}

template <class Real, int bytes, bool up>
void z_moebius_direction(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  switch (z.n / Block<Real, bytes>::width) {
    case 1: return z_moebius_blocks<Real, bytes, up, 1>(t, z);
    case 2: return z_moebius_blocks<Real, bytes, up, 2>(t, z);
    case 3: return z_moebius_blocks<Real, bytes, up, 3>(t, z);
    case 4: return z_moebius_blocks<Real, bytes, up, 4>(t, z);
    default: return z_moebius_blocks<Real, bytes, up, 0>(t, z);
  }
}

template <class Real>
void z_moebius_e(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  constexpr int line = 64 / static_cast<int>(sizeof(Real));
  for (int m = 0; m < 4 * z.n; m += line) __builtin_prefetch(z.memory + z.ahead + m, 1);
  if (WANEWALL_VECTOR_BYTES == 64 && z.n % line == 0)
    z.outwards_is_up ? z_moebius_direction<Real, 64, true>(t, z) : z_moebius_direction<Real, 64, false>(t, z);
  else
    z.outwards_is_up ? z_moebius_direction<Real, moebius_block_bytes, true>(t, z)
                     : z_moebius_direction<Real, moebius_block_bytes, false>(t, z);
}

/// The H side in whole blocks: psi acts before it takes in the new difference. Hx gains dEy/dz, Hy loses
/// dEx/dz.
template <class Real>
void z_layer_h_late(const RowTask<Real>& t, const ZLayerTask<Real>& z) {
  using B = Block<Real, moebius_block_bytes>;
  const Real *ex = t.other[0] + z.begin, *ey = t.other[1] + z.begin;
  Real *hx = t.own[0] + z.begin, *hy = t.own[1] + z.begin;
  __builtin_prefetch(z.psi_x + z.ahead, 1);
  __builtin_prefetch(z.psi_y + z.ahead, 1);
  int m = 0;
  for (; m + B::width <= z.n; m += B::width) {
    const auto old_x = B::load(z.psi_x + m), old_y = B::load(z.psi_y + m);
    const auto b = B::load(z.b + m), c = B::load(z.c + m);
    B::store(z.psi_x + m, b * old_x + c * (B::load(ey + m + 1) - B::load(ey + m)));
    B::store(z.psi_y + m, b * old_y + c * (B::load(ex + m + 1) - B::load(ex + m)));
    B::store(hx + m, B::load(hx + m) + B::load(z.gain_x + m) * old_x);
    B::store(hy + m, B::load(hy + m) - B::load(z.gain_y + m) * old_y);
  }
  for (; m < z.n; ++m) {
    const Real old_x = z.psi_x[m], old_y = z.psi_y[m];
    z.psi_x[m] = z.b[m] * old_x + z.c[m] * (ey[m + 1] - ey[m]);
    z.psi_y[m] = z.b[m] * old_y + z.c[m] * (ex[m + 1] - ex[m]);
    hx[m] += z.gain_x[m] * old_x;
    hy[m] -= z.gain_y[m] * old_y;
  }
}
