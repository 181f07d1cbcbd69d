#include "postproc/plane_power.hpp"

#include <Eigen/Core>
#include <algorithm>
#include <cmath>
#include <complex>

#include "geometry/constants.hpp"
#include "postproc/audit_planes.hpp"
#include "postproc/lattice_wave.hpp"

namespace wanewall {
namespace {

// Lengths that a range of cells gives to the samples of one axis, indexed like the stored samples: cells for
// half positions; for nodes the dual cell, cut where the range ends. On a periodic axis the last node, an
// image of the first, gets nothing and the first gets both halves.
Eigen::ArrayXd lengths_m(const Lattice& lattice, Component c, Axis a, IndexRange cells) {
  const MeshLines& lines = lattice.along(a);
  Eigen::ArrayXd lengths = Eigen::ArrayXd::Zero(lattice.stored(c, a).size());
  for (int i = cells.begin; i < cells.end; ++i) {
    if (is_half(c, a)) {
      lengths[i] = lines.cell_m(i);
    } else {
      lengths[i] += 0.5 * lines.cell_m(i);
      lengths[i + 1] += 0.5 * lines.cell_m(i);
    }
  }
  if (!is_half(c, a) && lattice.periodic[static_cast<std::size_t>(index_of(a))]) {
    lengths[0] += lengths[lines.cells()];
    lengths[lines.cells()] = 0.0;
  }
  return lengths;
}

double product_sum(const PlaneMap& e, const PlaneMap& h, const Eigen::ArrayXd& first_m,
                   const Eigen::ArrayXd& second_m) {
  double sum = 0.0;
  for (Eigen::Index p = 0; p < first_m.size(); ++p) {
    if (first_m[p] == 0.0) continue;
    double row = 0.0;
    for (Eigen::Index q = 0; q < second_m.size(); ++q) {
      const std::complex<double> ev = e(p, q), hv = h(p, q);
      row += second_m[q] * (ev.real() * hv.real() + ev.imag() * hv.imag());
    }
    sum += first_m[p] * row;
  }
  return sum;
}

double spacing_inside_m(const Lattice& lattice, Axis a) {
  const IndexRange clear = lattice.clear_cells(a);
  return lattice.along(a).cell_m((clear.begin + clear.end) / 2);
}

// The wavenumber kappa along a direction n:  sum ((2/d_i) sin(kappa n_i d_i/2))^2 = W^2. The sum grows with
// kappa up to the mesh's limit; where W lies beyond it the answer is that limit.
double wavenumber_along(const Lattice& lattice, const Vec3& n, double w_per_m) {
  const auto excess = [&](double kappa) {
    double sum = -w_per_m * w_per_m;
    for (Axis a : all_axes) {
      const double d = spacing_inside_m(lattice, a);
      const double k = 2.0 / d * std::sin(0.5 * d * kappa * n[static_cast<std::size_t>(index_of(a))]);
      sum += k * k;
    }
    return sum;
  };
  double lo = 0.0, hi = 1e300;
  for (Axis a : all_axes) {
    const double n_a = std::abs(n[static_cast<std::size_t>(index_of(a))]);
    if (n_a > 1e-12) hi = std::min(hi, pi / (n_a * spacing_inside_m(lattice, a)));
  }
  for (int i = 0; i < 200 && hi - lo > 1e-16 * hi; ++i) {
    const double middle = 0.5 * (lo + hi);
    (excess(middle) < 0.0 ? lo : hi) = middle;
  }
  return 0.5 * (lo + hi);
}

double impedance_ohm(const AuditFace& face) {
  return eta0_ohm * std::sqrt(face.permeability_rel / face.permittivity_rel);
}

}  // namespace

std::optional<NetPower> net_power(const Lattice& lattice, const AuditFace& face,
                                  std::size_t frequency_index) {
  const FaceAxes axes = axes_of(face.side);
  NetPower net;
  for (std::size_t i : {0u, 1u}) {
    const Axis along = axes.tangential[i], across = axes.tangential[1 - i];
    const AuditPlane* e = find_plane(lattice, face, electric(along), 0);
    const AuditPlane* h = find_plane(lattice, face, magnetic(across), 0);
    if (e == nullptr || h == nullptr) return std::nullopt;
    const PlaneMap e_sums = sums_at(lattice, face, *e, frequency_index);
    const PlaneMap h_sums = sums_at(lattice, face, *h, frequency_index);
    // (E x H*).n = E_1 H_2* - E_2 H_1* for a right-handed (first, second, outward normal).
    const double sign = (i == 0 ? 1.0 : -1.0) * axes.handedness * (is_high(face.side) ? 1.0 : -1.0);
    const auto sum_over = [&](bool whole) {
      std::array<Eigen::ArrayXd, 2> lengths;
      for (std::size_t t : {0u, 1u}) {
        const Axis a = axes.tangential[t];
        lengths[t] = lengths_m(lattice, e->component, a,
                               whole ? IndexRange{0, lattice.cells(a)} : lattice.clear_cells(a));
      }
      return 0.5 * sign * product_sum(e_sums, h_sums, lengths[0], lengths[1]);
    };
    net.clear_w_s2 += sum_over(false);
    net.whole_w_s2 += sum_over(true);
  }
  return net;
}

double clear_area_m2(const Lattice& lattice, Side side) {
  double area_m2 = 1.0;
  for (Axis a : axes_of(side).tangential) {
    const IndexRange clear = lattice.clear_cells(a);
    area_m2 *= lattice.along(a).node_m(clear.end) - lattice.along(a).node_m(clear.begin);
  }
  return area_m2;
}

std::optional<double> incident_power_w_s2(const Lattice& lattice, const AuditRecord& audit,
                                          const AuditFace& face, std::size_t frequency_index) {
  const double cosine =
      std::abs(audit.incident_direction[static_cast<std::size_t>(index_of(axis_of(face.side)))]);
  if (frequency_index >= audit.incident_v_s_per_m.size() || !(audit.incident_impedance_ohm > 0.0) ||
      !(cosine > 1e-6))
    return std::nullopt;
  double permittivity_rel = std::pow(eta0_ohm / audit.incident_impedance_ohm, 2);
  double permeability_rel = 1.0;
  for (const AuditFace& other : audit.faces) {
    if (std::abs(impedance_ohm(other) / audit.incident_impedance_ohm - 1.0) > 1e-6) continue;
    permittivity_rel = other.permittivity_rel;
    permeability_rel = other.permeability_rel;
  }
  const double w_per_m = face_medium(permittivity_rel, permeability_rel, 0.0,
                                     audit.frequencies_hz.at(frequency_index), lattice.dt_s)
                             .w_per_m();
  const double d = cell_outside_m(lattice, face, 0);
  const double kz = cosine * wavenumber_along(lattice, audit.incident_direction, w_per_m);
  return std::norm(audit.incident_v_s_per_m[frequency_index]) * clear_area_m2(lattice, face.side) *
         std::sin(kz * d) / (2.0 * audit.incident_impedance_ohm * w_per_m * d);
}

}  // namespace wanewall
