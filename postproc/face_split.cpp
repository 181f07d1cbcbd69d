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

// 6 dB: on eight runs of the method's trial two bins lay 2 and 5 dB above the bare rule.
constexpr double floor_margin = 4.0;

// One component's coefficients, or the plane waves made of them.
struct Parts {
  Matrix outgoing, returned, floor;
};

Matrix coefficients(const Matrix& plane, const std::array<AxisBasis, 2>& basis) {
  const IndexRange first = basis[0].indices, second = basis[1].indices;
  const Matrix half_way =
      basis[0].expand * plane.block(first.begin, second.begin, first.size(), second.size());
  return half_way * basis[1].expand.transpose();
}

Parts split(const Matrix& e0, const Matrix& e1, const Matrix& e2, const std::array<AxisBasis, 2>& basis,
            const LatticeMedium& medium, double spacing_m, double least_cosine) {
  Parts parts{Matrix(e0.rows(), e0.cols()), e0, e0};
  for (Eigen::Index q = 0; q < e0.cols(); ++q) {
    for (Eigen::Index p = 0; p < e0.rows(); ++p) {
      const Complex kz =
          normal_wavenumber(medium, basis[0].eigenvalue_per_m2[p] + basis[1].eigenvalue_per_m2[q], spacing_m);
      const Complex t = std::exp(-j * kz * spacing_m);
      const Complex there_and_back = t - 1.0 / t;
      // Closer to cut-off than a tapered basis tells waves apart, one wave's b would be its error blown up
      // without limit, and the second taper would spread that over all angles. Nothing is known of such a
      // wave but its size.
      const double least = std::max(1e-9, 0.2 * least_cosine * medium.w_per_m() * spacing_m);
      const bool at_cut_off = std::abs(there_and_back) < least;
      const Complex b = at_cut_off ? 0.0 : (e0(p, q) * t - e1(p, q)) / there_and_back;
      parts.returned(p, q) = b;
      parts.outgoing(p, q) = e0(p, q) - b;
      const Complex delta = t * (e0(p, q) - (t + 1.0 / t) * e1(p, q) + e2(p, q)) / there_and_back;
      const double divisor = std::max(std::abs(2.0 * std::sin(0.5 * spacing_m * kz)),
                                      least_cosine * medium.w_per_m() * spacing_m);
      parts.floor(p, q) = !at_cut_off ? delta / divisor : least_cosine > 0.0 ? e0(p, q) : Complex(0.0);
    }
  }
  return parts;
}

void to_plane_waves(Matrix& coefficients_in, const std::array<AxisBasis, 2>& basis) {
  if (basis[0].to_plane_waves.size() > 0) coefficients_in = Matrix(basis[0].to_plane_waves * coefficients_in);
  if (basis[1].to_plane_waves.size() > 0)
    coefficients_in = Matrix(coefficients_in * basis[1].to_plane_waves.transpose());
}

Parts component_parts(const std::array<Matrix, 3>& planes, const std::array<AxisBasis, 2>& basis,
                      const LatticeMedium& medium, double spacing_m, double least_cosine) {
  Parts parts = split(coefficients(planes[0], basis), coefficients(planes[1], basis),
                      coefficients(planes[2], basis), basis, medium, spacing_m, least_cosine);
  for (Matrix* m : {&parts.outgoing, &parts.returned, &parts.floor}) to_plane_waves(*m, basis);
  return parts;
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
  floor += other.floor;
  waves += other.waves;
  return *this;
}

std::string no_split_because(const Lattice& lattice, const AuditFace& face) {
  if (!face.is_uniform) {
    return face.is_layered
               ? "the face's plane crosses layers; the split of such faces follows in a later version"
               : "an object crosses the face's plane; the split of such faces follows in a later version";
  }
  const double inner_m = cell_outside_m(lattice, face, 0), outer_m = cell_outside_m(lattice, face, 1);
  if (std::abs(inner_m - outer_m) > 1e-9 * inner_m)
    return "the two cells between the audit's planes differ in length";
  return plane_waves_unfit_because(lattice, face.side);
}

TangentialPlanes tangential_planes(const Lattice& lattice, const AuditFace& face,
                                   std::size_t frequency_index) {
  TangentialPlanes planes;
  for (std::size_t i : {0u, 1u}) {
    const Component c = electric(axes_of(face.side).tangential[i]);
    for (int m = 0; m < 3; ++m) {
      const AuditPlane* plane = find_plane(lattice, face, c, m);
      if (plane == nullptr)
        throw std::invalid_argument(fmt::format("the shell audit of face {} lacks {} on plane {}",
                                                name_of(face.side), name_of(c), m));
      planes[i][static_cast<std::size_t>(m)] =
          sums_at(lattice, face, *plane, frequency_index).cast<Complex>();
    }
  }
  return planes;
}

FaceSplit split_planes(const TangentialPlanes& planes, double spacing_m, const LatticeMedium& medium,
                       const WaveBasis& basis, int angle_bins) {
  if (angle_bins < 1) throw std::invalid_argument("at least one bin of angle is needed");
  const Parts first = component_parts(planes[0], basis.parts[0], medium, spacing_m, basis.least_cosine);
  const Parts second = component_parts(planes[1], basis.parts[1], medium, spacing_m, basis.least_cosine);

  FaceSplit result;
  for (auto& bins : result.bins) bins.resize(static_cast<std::size_t>(angle_bins));
  const double w_per_m = medium.w_per_m();
  for (Eigen::Index q = 0; q < basis.plane_wave_per_m[1].size(); ++q) {
    for (Eigen::Index p = 0; p < basis.plane_wave_per_m[0].size(); ++p) {
      const double k1 = basis.plane_wave_per_m[0][p], k2 = basis.plane_wave_per_m[1][q];
      const double sin_theta = std::hypot(k1, k2) / w_per_m;
      if (sin_theta >= grazing_limit) continue;
      const Complex kz = normal_wavenumber(medium, -(k1 * k1 + k2 * k2), spacing_m);
      const NormalFlux flux = normal_flux(medium, kz, spacing_m);
      const auto bin = static_cast<std::size_t>(
          std::min(angle_bins - 1, static_cast<int>(std::asin(sin_theta) / (0.5 * pi) * angle_bins)));

      const Squares out = squares(first.outgoing(p, q), second.outgoing(p, q), k1, k2);
      const Squares back = squares(first.returned(p, q), second.returned(p, q), k1, k2);
      const Squares floor = squares(first.floor(p, q), second.floor(p, q), k1, k2);
      const auto add = [&](Polarisation pol, double o, double b, double f, double flux_out,
                           double flux_back) {
        const double scale = basis.per_area_per_m2;
        result.bins[index_of(pol)][bin] +=
            {scale * o * flux_out, scale * b * flux_back, floor_margin * scale * f * flux_back, 1};
      };
      add(Polarisation::te, out.te, back.te, floor.te, flux.te_outgoing, flux.te_returned);
      add(Polarisation::tm, out.tm, back.tm, floor.tm, flux.tm_outgoing, flux.tm_returned);
    }
  }
  for (Polarisation pol : both_polarisations)
    for (const SplitPower& bin : result.bins[index_of(pol)]) result.totals[index_of(pol)] += bin;
  return result;
}

}  // namespace wanewall
