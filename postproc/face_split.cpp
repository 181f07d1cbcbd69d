#include "postproc/face_split.hpp"

#include <fmt/format.h>

#include <Eigen/Core>
#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "geometry/constants.hpp"
#include "postproc/audit_planes.hpp"

namespace wanewall {
namespace {

using Complex = std::complex<double>;
using Matrix = Eigen::MatrixXcd;
constexpr Complex j{0.0, 1.0};
constexpr double grazing_limit = 0.9998;

// 6 dB: true errors lay up to 5 dB above the bare rule in bins of angle, and up to 3.3 dB above it for a face
// as a whole (tests/published/test_shell_audit.cpp, records cut short).
constexpr double floor_margin = 4.0;

// One component's coefficients, or the plane waves made of them.
struct Parts {
  Matrix outgoing, returned, expected, floor, difference;
};

// How one component's planes are split.
struct SplitRule {
  Complex w2_per_m2;  // what the eigenvalues do not hold
  double spacing_m = 0.0;
  double least = 0.0;          // of |t - 1/t|: closer to cut-off nothing is known but the wave's size
  double least_divisor = 0.0;  // of the floor
  bool tapered = false;
  double from_plane_0 = 0.0;  // of the first of the planes, in cells, outwards
  double sign = 1.0;          // of the component's reflection relative to that of tangential E
};

Matrix coefficients(const Matrix& plane, const std::array<AxisBasis, 2>& basis) {
  const IndexRange first = basis[0].indices, second = basis[1].indices;
  const Matrix half_way =
      basis[0].expand * plane.block(first.begin, second.begin, first.size(), second.size());
  return half_way * basis[1].expand.transpose();
}

Parts split(const std::array<Matrix, 3>& planes, const std::array<AxisBasis, 2>& basis, const SplitRule& rule,
            const FaceTheory& theory) {
  const Matrix e0 = coefficients(planes[0], basis), e1 = coefficients(planes[1], basis),
               e2 = coefficients(planes[2], basis);
  Parts parts{e0, e0, Matrix::Zero(e0.rows(), e0.cols()), e0, e0};
  for (Eigen::Index q = 0; q < e0.cols(); ++q) {
    for (Eigen::Index p = 0; p < e0.rows(); ++p) {
      const Complex k_n2 = rule.w2_per_m2 + basis[0].eigenvalue_per_m2[p] + basis[1].eigenvalue_per_m2[q];
      const Complex kz = outward_wavenumber(k_n2, rule.spacing_m);
      const Complex t = std::exp(-j * kz * rule.spacing_m);
      const Complex there_and_back = t - 1.0 / t;
      // Closer to cut-off than a tapered basis tells waves apart, one wave's b would be its error blown up
      // without limit, and the second taper would spread that over all angles.
      const bool at_cut_off = std::abs(there_and_back) < rule.least;
      const Complex b = at_cut_off ? 0.0 : (e0(p, q) * t - e1(p, q)) / there_and_back;
      const Complex delta = t * (e0(p, q) - (t + 1.0 / t) * e1(p, q) + e2(p, q)) / there_and_back;
      const double divisor =
          std::max(std::abs(2.0 * std::sin(0.5 * rule.spacing_m * kz)), rule.least_divisor);
      const Complex to_plane_0 = std::exp(j * kz * rule.spacing_m * rule.from_plane_0);
      parts.returned(p, q) = b / to_plane_0;
      parts.outgoing(p, q) = (e0(p, q) - b) * to_plane_0;
      parts.floor(p, q) = !at_cut_off ? delta / divisor : rule.tapered ? e0(p, q) : Complex(0.0);
      parts.difference(p, q) = at_cut_off ? Complex(0.0) : delta;
      if (theory.reflection)
        parts.expected(p, q) = rule.sign * theory.reflection(k_n2) *
                               std::exp(-2.0 * j * kz * rule.spacing_m * double(theory.cells_to_shell)) *
                               parts.outgoing(p, q);
    }
  }
  return parts;
}

// Coefficients on the two axes as samples of the plane.
double norm_on_plane(const Matrix& coefficients_in, const std::array<AxisBasis, 2>& basis) {
  return (basis[0].modes * coefficients_in * basis[1].modes.transpose()).squaredNorm();
}

void to_plane_waves(Parts& parts, const std::array<AxisBasis, 2>& basis) {
  for (Matrix* m : {&parts.outgoing, &parts.returned, &parts.expected, &parts.floor}) {
    if (basis[0].to_plane_waves.size() > 0 || basis[0].modes.size() > 0)
      *m = Matrix(basis[0].to_plane_waves * *m);
    if (basis[1].to_plane_waves.size() > 0 || basis[1].modes.size() > 0)
      *m = Matrix(*m * basis[1].to_plane_waves.transpose());
  }
}

// Squares of TE and TM amplitude of a plane wave from its two Cartesian components. The lattice's own K make
// the two exactly orthogonal.
struct Squares {
  double te, tm;
};
Squares squares(Complex first, Complex second, double k_first, double k_second) {
  const double k_t = std::hypot(k_first, k_second);
  const double cos_phi = k_t > 0.0 ? k_first / k_t : 1.0;
  const double sin_phi = k_t > 0.0 ? k_second / k_t : 0.0;
  return {std::norm(cos_phi * second - sin_phi * first), std::norm(cos_phi * first + sin_phi * second)};
}

}  // namespace

SplitPower& SplitPower::operator+=(const SplitPower& other) {
  outgoing += other.outgoing;
  returned += other.returned;
  expected += other.expected;
  floor += other.floor;
  waves += other.waves;
  return *this;
}

std::string no_split_because(const Lattice& lattice, const AuditRecord& audit, const AuditFace& face) {
  const bool records_tangential_e = face.is_uniform || !face.is_layered;
  if (!face.clear_is_uniform && !face.is_layered) return "an object crosses the face's plane";
  const double inner_m = cell_outside_m(lattice, face, 0), outer_m = cell_outside_m(lattice, face, 1);
  if (std::abs(inner_m - outer_m) > 1e-9 * inner_m)
    return "the two cells between the audit's planes differ in length";
  const std::string modes_unfit = modes_unfit_because(lattice, audit.shell, face);
  if (modes_unfit.empty()) return {};
  return records_tangential_e ? plane_waves_unfit_because(lattice, face.side)
                              : "the face's plane crosses layers, and " + modes_unfit;
}

FacePlanes face_planes(const Lattice& lattice, const AuditFace& face, std::size_t frequency_index) {
  FacePlanes planes;
  const bool layered = !face.is_uniform;
  for (std::size_t i : {0u, 1u}) {
    const Component c =
        layered ? (i == 0 ? Component::hz : Component::ez) : electric(axes_of(face.side).tangential[i]);
    for (int m = 0; m < 3; ++m) {
      const int at = is_electric(c) ? m : m - 1;
      const AuditPlane* plane = find_plane(lattice, face, c, at);
      if (plane == nullptr)
        throw std::invalid_argument(fmt::format("the shell audit of face {} lacks {} on plane {}",
                                                name_of(face.side), name_of(c), at));
      planes[i][static_cast<std::size_t>(m)] = sums_at(lattice, face, *plane, frequency_index);
    }
  }
  return planes;
}

FaceSplit split_planes(const FacePlanes& planes, Side side, double spacing_m, const FaceMedium& medium,
                       const WaveBasis& basis, int angle_bins, const FaceTheory& theory) {
  if (angle_bins < 1) throw std::invalid_argument("at least one bin of angle is needed");
  const double w_per_m = medium.w_per_m();
  const bool layered = basis.fields == SplitFields::hz_and_ez;
  std::array<Parts, 2> parts;
  FaceSplit result;
  WholePlane whole;
  double outgoing = 0.0, returned = 0.0, expected = 0.0, difference = 0.0, unexpected = 0.0;
  for (std::size_t c : {0u, 1u}) {
    SplitRule rule;
    rule.w2_per_m2 = basis.eigenvalues_hold_w2 ? Complex(0.0) : medium.w2_per_m2;
    rule.spacing_m = spacing_m;
    rule.tapered = basis.least_cosine > 0.0;
    rule.least_divisor = basis.least_cosine * w_per_m * spacing_m;
    rule.least = std::max(1e-9, 0.2 * rule.least_divisor);
    const bool is_hz = layered && c == 0;
    rule.from_plane_0 = is_hz ? -0.5 : 0.0;
    rule.sign = is_hz ? -1.0 : 1.0;
    parts[c] = split(planes[c], basis.parts[c], rule, theory);
    if (basis.has_modes()) {
      const double weight = is_hz ? eta0_ohm * eta0_ohm : 1.0;
      const auto norm = [&](const Matrix& m) { return weight * norm_on_plane(m, basis.parts[c]); };
      outgoing += norm(parts[c].outgoing);
      returned += norm(parts[c].returned);
      difference += norm(parts[c].difference);
      expected += norm(parts[c].expected);
      unexpected += norm(parts[c].returned - parts[c].expected);
    }
    to_plane_waves(parts[c], basis.parts[c]);
  }
  if (basis.has_modes() && outgoing > 0.0) {
    whole.returned = std::sqrt(returned / outgoing);
    whole.floor = std::sqrt(floor_margin * difference / outgoing) / (w_per_m * spacing_m);
    if (theory.reflection) {
      whole.expected = std::sqrt(expected / outgoing);
      whole.closure = std::sqrt(unexpected / outgoing);
    }
    result.whole = whole;
  }

  for (auto& bins : result.bins) bins.resize(static_cast<std::size_t>(angle_bins));
  // E along the first axis from H_z and E_z (see face_split.hpp); K_n is counted along the axis itself.
  const double outwards = is_high(side) ? 1.0 : -1.0;
  const auto first_of = [&](Complex hz_or_first, Complex ez, double k1, double k2, Complex k_n, double way) {
    if (!layered) return hz_or_first;
    return (axes_of(side).handedness * way * outwards * k_n * medium.omega_mu_ohm_per_m * hz_or_first -
            k1 * k2 * ez) /
           (k_n * k_n + k1 * k1);
  };
  for (Eigen::Index q = 0; q < basis.plane_wave_per_m[1].size(); ++q) {
    for (Eigen::Index p = 0; p < basis.plane_wave_per_m[0].size(); ++p) {
      const double k1 = basis.plane_wave_per_m[0][p], k2 = basis.plane_wave_per_m[1][q];
      const double sin_theta = std::hypot(k1, k2) / w_per_m;
      if (sin_theta >= grazing_limit) continue;
      const Complex kz = normal_wavenumber(medium, -(k1 * k1 + k2 * k2), spacing_m);
      const Complex k_n = 2.0 / spacing_m * std::sin(0.5 * spacing_m * kz);
      const NormalFlux flux = normal_flux(medium, kz, spacing_m);
      const auto bin = static_cast<std::size_t>(
          std::min(angle_bins - 1, static_cast<int>(std::asin(sin_theta) / (0.5 * pi) * angle_bins)));
      const auto squares_of = [&](Matrix Parts::*part, double way) {
        const Complex second = (parts[1].*part)(p, q);
        return squares(first_of((parts[0].*part)(p, q), second, k1, k2, k_n, way), second, k1, k2);
      };
      const Squares out = squares_of(&Parts::outgoing, 1.0), back = squares_of(&Parts::returned, -1.0),
                    awaited = squares_of(&Parts::expected, -1.0), floor = squares_of(&Parts::floor, -1.0);
      const auto add = [&](Polarisation pol, double o, double b, double e, double f, double flux_out,
                           double flux_back) {
        const double scale = basis.per_area_per_m2;
        result.bins[index_of(pol)][bin] += {scale * o * flux_out, scale * b * flux_back,
                                            scale * e * flux_back, floor_margin * scale * f * flux_back, 1};
      };
      add(Polarisation::te, out.te, back.te, awaited.te, floor.te, flux.te_outgoing, flux.te_returned);
      add(Polarisation::tm, out.tm, back.tm, awaited.tm, floor.tm, flux.tm_outgoing, flux.tm_returned);
    }
  }
  for (Polarisation pol : both_polarisations)
    for (const SplitPower& bin : result.bins[index_of(pol)]) result.totals[index_of(pol)] += bin;
  return result;
}

}  // namespace wanewall
