// The row kernels against a loop that anybody can check, at awkward lengths and with every kind of span and
// layer.
#include <catch2/catch.hpp>
#include <cstring>
#include <random>

#include "solver/aligned_array.hpp"
#include "solver/row_kernels.hpp"
#include "solver/table_kernels.hpp"

using namespace wanewall;

namespace {

template <class Real>
struct Row {
  static constexpr int line = 64 / sizeof(Real);
  AlignedArray<Real> memory;
  Real* k0;
  Row(int padded, std::mt19937& random) : memory(static_cast<std::size_t>(padded + 2 * line)) {
    std::uniform_real_distribution<double> uniform(-1.0, 1.0);
    for (std::size_t n = 0; n < memory.size(); ++n) memory[n] = static_cast<Real>(uniform(random));
    k0 = memory.data() + line;
  }
};

/// What the kernels compute, said plainly: one value at a time, in the same order of operations.
template <class Real>
void plain_row(RowTask<Real> t, bool electric) {
  for (int s = 0; s < t.n_spans; ++s) {
    const MediaSpan<Real>& span = t.spans[s];
    for (int k = span.begin; k < span.end; ++k) {
      const auto difference = [&](const Real* here, const Real* beside) {
        return electric ? here[k] - beside[k] : beside[k] - here[k];
      };
      const auto along_z = [&](const Real* here) {
        return t.inv_z[k] * (electric ? here[k] - here[k - 1] : here[k + 1] - here[k]);
      };
      const auto stretch = [&](Real d, Real inv, Real b, Real c, Real* psi, bool late, const Real* given) {
        if (given) return inv * given[k];
        if (!psi) return inv * d;
        const Real old = psi[k];
        psi[k] = b * old + c * d;
        return inv * d + (late ? old : psi[k]);
      };
      const Real dy_z = stretch(difference(t.other[2], t.beside_y[2]), t.inv_y, t.y_b, t.y_c, t.y_psi_second,
                                t.y_late, t.y_given_second);
      const Real dy_x = stretch(difference(t.other[0], t.beside_y[0]), t.inv_y, t.y_b, t.y_c, t.y_psi_first,
                                t.y_late, t.y_given_first);
      const Real dx_y = stretch(difference(t.other[1], t.beside_x[1]), t.inv_x, t.x_b, t.x_c, t.x_psi_second,
                                t.x_late, t.x_given_second);
      const Real dx_z = stretch(difference(t.other[2], t.beside_x[2]), t.inv_x, t.x_b, t.x_c, t.x_psi_first,
                                t.x_late, t.x_given_first);
      const Real dz_y = along_z(t.other[1]), dz_x = along_z(t.other[0]);
      const Real curl[3]{electric ? dy_z - dz_y : dz_y - dy_z, electric ? dz_x - dx_z : dx_z - dz_x,
                         electric ? dx_y - dy_x : dy_x - dx_y};
      for (int c = 0; c < 3; ++c) {
        const int length = span.end - span.begin;
        const Real decay = span.mixed ? span.mixed[2 * c * length + k - span.begin] : span.decay[c];
        const Real gain = span.mixed ? span.mixed[(2 * c + 1) * length + k - span.begin] : span.gain[c];
        t.own[c][k] = decay * t.own[c][k] + gain * curl[c];
      }
    }
  }
}

template <class Real>
void compare(VectorCode code) {
  constexpr int line = Row<Real>::line;
  std::mt19937 random(7);
  for (const int lines : {1, 2, 3, 7}) {
    for (int variant = 0; variant < 128; ++variant) {
      const bool layer_x = variant & 1, layer_y = variant & 2, mixed = variant & 4, electric = variant & 8,
                 gap = (variant & 16) && lines > 2, moebius = variant & 32, lossless = variant & 64;
      const int n = lines * line;
      std::vector<Row<Real>> rows;
      for (int r = 0; r < 21; ++r) rows.emplace_back(n, random);
      const Row<Real> coefficients(6 * n, random);
      std::vector<MediaSpan<Real>> spans;
      const auto span = [&](int begin, int end, bool with_arrays) {
        MediaSpan<Real> s;
        s.begin = begin;
        s.end = end;
        for (int c = 0; c < 3; ++c) {
          s.decay[c] = lossless ? Real(1) : Real(0.9 - 0.1 * c);
          s.gain[c] = Real(0.3 + 0.1 * c);
        }
        if (with_arrays) s.mixed = coefficients.k0;
        spans.push_back(s);
      };
      // One span, or two of which the middle line belongs to neither.
      if (gap) {
        span(0, line, mixed);
        span(2 * line, n, !mixed);
      } else {
        span(0, n, mixed);
      }
      RowTask<Real> task;
      for (std::size_t c = 0; c < 3; ++c) {
        task.own[c] = rows[c].k0;
        task.other[c] = rows[3 + c].k0;
        task.beside_x[c] = rows[6 + c].k0;
        task.beside_y[c] = rows[9 + c].k0;
      }
      task.inv_x = Real(1.1);
      task.inv_y = Real(0.7);
      task.inv_z = rows[12].k0;
      task.spans = spans.data();
      task.n_spans = static_cast<int>(spans.size());
      if (layer_x) {
        task.x_b = Real(0.8);
        task.x_c = Real(-0.4);
        task.x_psi_first = rows[13].k0;
        task.x_psi_second = rows[14].k0;
        task.x_late = moebius && !electric;
        if (moebius && electric) {
          task.x_given_first = rows[17].k0;
          task.x_given_second = rows[18].k0;
        }
      }
      if (layer_y) {
        task.y_b = Real(0.6);
        task.y_c = Real(-0.5);
        task.y_psi_first = rows[15].k0;
        task.y_psi_second = rows[16].k0;
        task.y_late = moebius && !electric;
        if (moebius && electric) {
          task.y_given_first = rows[19].k0;
          task.y_given_second = rows[20].k0;
        }
      }
      std::vector<std::vector<Real>> before;
      for (const auto& row : rows)
        before.emplace_back(row.memory.data(), row.memory.data() + row.memory.size());
      plain_row(task, electric);
      std::vector<std::vector<Real>> expected;
      for (auto& row : rows) expected.emplace_back(row.memory.data(), row.memory.data() + row.memory.size());
      for (std::size_t r = 0; r < rows.size(); ++r)
        std::copy(before[r].begin(), before[r].end(), rows[r].memory.data());
      const RowKernels<Real>& kernels = row_kernels<Real>(code);
      (electric ? kernels.advance_e : kernels.advance_h)(task);
      // Bit for bit, and nothing outside the spans or in the rows that are only read has moved.
      for (std::size_t r = 0; r < rows.size(); ++r) {
        CAPTURE(kernels.name, lines, layer_x, layer_y, mixed, electric, gap, moebius, lossless, r);
        REQUIRE(std::memcmp(expected[r].data(), rows[r].memory.data(), expected[r].size() * sizeof(Real)) ==
                0);
      }
    }
  }
}

}  // namespace

TEST_CASE("Row kernels agree with the plain loop, bit for bit", "[kernels]") {
  for (int code = 0; code <= static_cast<int>(best_vector_code()); ++code) {
    compare<float>(static_cast<VectorCode>(code));
    compare<double>(static_cast<VectorCode>(code));
  }
}

TEST_CASE("Sums of a running DFT: every vector code gives the bits of the plain loop", "[kernels][exact]") {
  std::mt19937 random(11);
  std::uniform_real_distribution<double> uniform(-1.0, 1.0);
  for (const std::size_t n_frequencies : {1u, 2u, 4u, 9u}) {
    for (const std::size_t n_samples : {1u, 5u, 16u}) {
      constexpr std::size_t n_groups = 3, stride = n_groups * sum_group + 5;
      std::vector<float> samples(n_samples * stride);
      std::vector<double> cosine(n_frequencies * n_samples), minus_sine(cosine.size()),
          start(n_groups * n_frequencies * 2 * sum_group);
      for (float& value : samples) value = static_cast<float>(uniform(random));
      for (auto* values : {&cosine, &minus_sine, &start})
        for (double& value : *values) value = uniform(random);
      std::vector<double> expected = start;
      for (std::size_t m = 0; m < n_groups * sum_group; ++m)
        for (std::size_t f = 0; f < n_frequencies; ++f)
          for (std::size_t s = 0; s < n_samples; ++s) {
            double* sum =
                expected.data() + (m / sum_group * n_frequencies + f) * 2 * sum_group + m % sum_group;
            const auto value = static_cast<double>(samples[s * stride + m]);
            sum[0] += cosine[f * n_samples + s] * value;
            sum[sum_group] += minus_sine[f * n_samples + s] * value;
          }
      for (int code = 0; code <= static_cast<int>(best_vector_code()); ++code) {
        AlignedArray<double> sums(start.size());
        std::copy(start.begin(), start.end(), sums.data());
        add_samples<float>(static_cast<VectorCode>(code))({samples.data(), stride, n_samples, cosine.data(),
                                                           minus_sine.data(), n_frequencies, sums.data(),
                                                           n_groups});
        CAPTURE(code, n_frequencies, n_samples);
        CHECK(std::memcmp(sums.data(), expected.data(), expected.size() * sizeof(double)) == 0);
      }
    }
  }
}
