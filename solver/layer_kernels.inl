// Included by row_kernels.inl, within its vector namespace.

/// One forward and one backward sweep over the layer per vector of k; both components at once, since each
/// sweep waits for itself.
template <class Real>
void moebius_columns(const ColumnTask<Real>& task) {
  using V = Vector<Real>;
  const ColumnTask<Real> t = task;  // of our own, so that no store can change it
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

/// What one component of z_moebius_blocks keeps between its sweeps.
template <class Real, int bytes, int most>
struct ZMoebiusPart {
  using Any = typename Block<Real, bytes>::Any;
  Any df[most], even[most], odd[most];  // two sums, so that one addition need not wait for the last
  alignas(64) Real rest[most * Block<Real, bytes>::width];
};

template <class Real, int bytes, bool up, int most>
inline __attribute__((always_inline)) void z_moebius_begin(const Real* h, const Real* a, const Real* d, int blocks,
                                                           ZMoebiusPart<Real, bytes, most>& part) {
  using B = Block<Real, bytes>;
  using Any = typename B::Any;
  constexpr int width = B::width;
  Any sum[most + 2];  // A + D with nothing at both ends
  sum[0] = sum[blocks + 1] = Any{};
#pragma GCC unroll 4
  for (int v = 0; v < blocks; ++v) sum[v + 1] = B::load(a + v * width) + B::load(d + v * width);
#pragma GCC unroll 4
  for (int v = 0; v < blocks; ++v) {
    part.df[v] = B::load(h + v * width) - B::load(h + v * width - 1);
    const Any inner = B::template neighbour<!up>(sum[v], sum[v + 1], sum[v + 2]);
    const Any f = (B::load(a + v * width) - B::load(d + v * width)) + inner;
    B::store(part.rest + v * width, part.df[v] - Real(0.25) * f);
    part.even[v] = part.odd[v] = Any{};
  }
}

template <class Real, int bytes, bool up, int most>
inline __attribute__((always_inline)) void z_moebius_end(Real* own, const Real* gain, const Real* inv_z, Real* a,
                                                         Real* d, Real sign, int blocks,
                                                         const MoebiusNumbers<Real>& numbers,
                                                         const ZMoebiusPart<Real, bytes, most>& part) {
  using B = Block<Real, bytes>;
  using Any = typename B::Any;
  Any g[most + 2];
  g[0] = g[blocks + 1] = Any{};
#pragma GCC unroll 4
  for (int v = 0; v < blocks; ++v) g[v + 1] = part.even[v] + part.odd[v];
#pragma GCC unroll 4
  for (int v = 0; v < blocks; ++v) {
    const int m = v * B::width;
    const Any here = g[v + 1];
    const Any outer = B::template neighbour<up>(g[v], here, g[v + 2]);
    const Any change = B::load(gain + m) * B::load(inv_z + m) * (here - part.df[v]);
    B::store(a + m, B::load(numbers.b + m) * B::load(a + m) + B::load(numbers.r + m) * (here + outer));
    B::store(d + m,
             B::load(numbers.b_inverse + m) * B::load(d + m) + B::load(numbers.r_inverse + m) * (outer - here));
    B::store(own + m, B::load(own + m) + sign * change);
  }
}

/// own += sign gain inv_z (M^-1 df - df) for both components; `n_blocks` blocks, or as many as the task says
/// when zero. Ex has -dHy/dz, Ey has +dHx/dz. Pointers lead to entry 0 of the task.
template <class Real, int bytes, bool up, int n_blocks>
void z_moebius_blocks(Real* ex, Real* ey, const Real* hx, const Real* hy, const Real* inv_z,
                      const ZMoebiusTask<Real>& task) {
  using B = Block<Real, bytes>;
  using Any = typename B::Any;
  constexpr int width = B::width;
  constexpr int most = n_blocks > 0 ? n_blocks : (most_moebius_cells + width - 1) / width;
  const ZMoebiusTask<Real> z = task;  // of our own, so that no store can change it
  const int blocks = n_blocks > 0 ? n_blocks : z.n / width;
  ZMoebiusPart<Real, bytes, most> x{}, y{};
  z_moebius_begin<Real, bytes, up, most>(hy, z.memory, z.memory + z.n, blocks, x);
  z_moebius_begin<Real, bytes, up, most>(hx, z.memory + 2 * z.n, z.memory + 3 * z.n, blocks, y);
  int source = z.first;
  for (; source + 1 < z.last; source += 2) {
#pragma GCC unroll 4
    for (int v = 0; v < blocks; ++v) {
      const Any even = B::load(z.dense + source * z.n + v * width);
      const Any odd = B::load(z.dense + (source + 1) * z.n + v * width);
      x.even[v] += x.rest[source] * even;
      y.even[v] += y.rest[source] * even;
      x.odd[v] += x.rest[source + 1] * odd;
      y.odd[v] += y.rest[source + 1] * odd;
    }
  }
  if (source < z.last) {
#pragma GCC unroll 4
    for (int v = 0; v < blocks; ++v) {
      const Any even = B::load(z.dense + source * z.n + v * width);
      x.even[v] += x.rest[source] * even;
      y.even[v] += y.rest[source] * even;
    }
  }
  z_moebius_end<Real, bytes, up, most>(ex, z.gain_x, inv_z, z.memory, z.memory + z.n, Real(-1), blocks, z.numbers,
                                       x);
  z_moebius_end<Real, bytes, up, most>(ey, z.gain_y, inv_z, z.memory + 2 * z.n, z.memory + 3 * z.n, Real(1), blocks,
                                       z.numbers, y);
}

template <class Real, int bytes, bool up>
void z_moebius_direction(Real* ex, Real* ey, const Real* hx, const Real* hy, const Real* inv_z,
                         const ZMoebiusTask<Real>& z) {
  switch (z.n / Block<Real, bytes>::width) {
    case 1: return z_moebius_blocks<Real, bytes, up, 1>(ex, ey, hx, hy, inv_z, z);
    case 2: return z_moebius_blocks<Real, bytes, up, 2>(ex, ey, hx, hy, inv_z, z);
    case 3: return z_moebius_blocks<Real, bytes, up, 3>(ex, ey, hx, hy, inv_z, z);
    case 4: return z_moebius_blocks<Real, bytes, up, 4>(ex, ey, hx, hy, inv_z, z);
    default: return z_moebius_blocks<Real, bytes, up, 0>(ex, ey, hx, hy, inv_z, z);
  }
}

template <class Real>
void z_moebius_at(Real* ex, Real* ey, const Real* hx, const Real* hy, const Real* inv_z,
                  const ZMoebiusTask<Real>& z) {
  constexpr int line = 64 / static_cast<int>(sizeof(Real));
  if (WANEWALL_VECTOR_BYTES == 64 && z.n % line == 0)
    z.outwards_is_up ? z_moebius_direction<Real, 64, true>(ex, ey, hx, hy, inv_z, z)
                     : z_moebius_direction<Real, 64, false>(ex, ey, hx, hy, inv_z, z);
  else
    z.outwards_is_up ? z_moebius_direction<Real, moebius_block_bytes, true>(ex, ey, hx, hy, inv_z, z)
                     : z_moebius_direction<Real, moebius_block_bytes, false>(ex, ey, hx, hy, inv_z, z);
}

/// A window that reaches beyond the row works on a copy.
template <class Real>
void z_moebius_in_short_row(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  constexpr int room = most_moebius_cells + 64 / static_cast<int>(sizeof(Real)) + 1;
  Real copy[5][room]{};  // Ex, Ey, Hx, Hy, 1/dz; one entry in front
  const Real* from[5]{t.own[0], t.own[1], t.other[0], t.other[1], t.inv_z};
  for (int array = 0; array < 5; ++array)
    for (int m = array == 2 || array == 3 ? z.first - 1 : z.first; m < z.last; ++m)
      copy[array][m + 1] = from[array][z.begin + m];
  z_moebius_at(copy[0] + 1, copy[1] + 1, copy[2] + 1, copy[3] + 1, copy[4] + 1, z);
  for (int array = 0; array < 2; ++array)
    for (int m = z.first; m < z.last; ++m) t.own[array][z.begin + m] = copy[array][m + 1];
}

template <class Real>
void z_moebius_e(const RowTask<Real>& t, const ZMoebiusTask<Real>& z) {
  constexpr int line = 64 / static_cast<int>(sizeof(Real));
  for (int m = 0; m < 4 * z.n; m += line) __builtin_prefetch(z.memory + z.ahead + m, 1);
  if (z.fits)
    z_moebius_at(t.own[0] + z.begin, t.own[1] + z.begin, t.other[0] + z.begin, t.other[1] + z.begin,
                 t.inv_z + z.begin, z);
  else
    z_moebius_in_short_row(t, z);
}

/// Entries m .. of z_layer, one block of them.
template <class B, class Real, bool electric, bool late>
inline __attribute__((always_inline)) void z_layer_block(Real* own_x, Real* own_y, const Real* other_x,
                                                         const Real* other_y, const ZLayerTask<Real>& z, int m) {
  // Difference across the entry: E lies on nodes, between the H half a cell above and below.
  constexpr int up = electric ? 0 : 1, down = electric ? -1 : 0;
  const auto old_x = B::load(z.psi_x + m), old_y = B::load(z.psi_y + m);
  const auto b = B::load(z.b + m), c = B::load(z.c + m);
  const auto new_x = b * old_x + c * (B::load(other_y + m + up) - B::load(other_y + m + down));
  const auto new_y = b * old_y + c * (B::load(other_x + m + up) - B::load(other_x + m + down));
  B::store(z.psi_x + m, new_x);
  B::store(z.psi_y + m, new_y);
  const auto change_x = B::load(z.gain_x + m) * (late ? old_x : new_x);
  const auto change_y = B::load(z.gain_y + m) * (late ? old_y : new_y);
  const auto x = B::load(own_x + m), y = B::load(own_y + m);
  B::store(own_x + m, electric ? x - change_x : x + change_x);
  B::store(own_y + m, electric ? y + change_y : y - change_y);
}

/// Parts of rows with one memory per component, in blocks; what no block fills is done one by one.
///   E: Ex gains -psi of dHy/dz, Ey +psi of dHx/dz;  H: Hx gains +psi of dEy/dz, Hy -psi of dEx/dz.
/// `late`: psi acts before it takes in the new difference.
template <class Real, bool electric, bool late>
void z_layer(const RowTask<Real>& t, const ZLayerTask<Real>& task) {
  using Line = Block<Real, 64>;
  using Half = Block<Real, moebius_block_bytes>;
  using Single = Block<Real, static_cast<int>(sizeof(Real))>;
  const ZLayerTask<Real> z = task;  // of our own, so that no store can change it
  Real* const own_x = t.own[0] + z.begin;
  Real* const own_y = t.own[1] + z.begin;
  const Real *const other_x = t.other[0] + z.begin, *const other_y = t.other[1] + z.begin;
  __builtin_prefetch(z.psi_x + z.ahead, 1);
  __builtin_prefetch(z.psi_y + z.ahead, 1);
  int m = 0;
  if constexpr (WANEWALL_VECTOR_BYTES == 64)
    for (; m + Line::width <= z.n; m += Line::width)
      z_layer_block<Line, Real, electric, late>(own_x, own_y, other_x, other_y, z, m);
  for (; m + Half::width <= z.n; m += Half::width)
    z_layer_block<Half, Real, electric, late>(own_x, own_y, other_x, other_y, z, m);
  for (; m < z.n; ++m) z_layer_block<Single, Real, electric, late>(own_x, own_y, other_x, other_y, z, m);
}
