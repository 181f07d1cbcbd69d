#include "postproc/plane_power.hpp"

#include <catch2/catch.hpp>
#include <cmath>
#include <stdexcept>

#include "tests/postproc/lattice_fields.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

// Waves that fit the periodic cross-section, with unrelated amplitudes of both polarisations.
WaveSum periodic_waves(const TestFace& face, bool with_return) {
  const double period_u = face.clear_cells[0] * face.spacing_m[0],
               period_v = face.clear_cells[1] * face.spacing_m[1];
  const Eigen::ArrayXd index = Eigen::ArrayXd::LinSpaced(3, -1, 1);
  WaveSum waves = WaveSum::zero(index * 2.0 * pi / period_u, index * 2.0 * pi / period_v);
  double phase = 0.3;
  for (Eigen::Index p = 0; p < 3; ++p) {
    for (Eigen::Index q = 0; q < 3; ++q) {
      waves.te_out(p, q) = std::polar(1.0 + 0.1 * static_cast<double>(p), phase += 1.1);
      waves.tm_out(p, q) = std::polar(0.6 + 0.2 * static_cast<double>(q), phase += 0.9);
      if (!with_return) continue;
      waves.te_in(p, q) = std::polar(0.4, phase += 2.3);
      waves.tm_in(p, q) = std::polar(0.3, phase += 1.7);
    }
  }
  return waves;
}

double area_m2(const TestFace& face, int more_cells) {
  return (face.clear_cells[0] + more_cells) * face.spacing_m[0] * (face.clear_cells[1] + more_cells) *
         face.spacing_m[1];
}

double power_by_flux(const TestFace& face, const WaveSum& waves) {
  double sum = 0.0;
  for (Eigen::Index p = 0; p < waves.te_out.rows(); ++p) {
    for (Eigen::Index q = 0; q < waves.te_out.cols(); ++q) {
      const double ku = lattice_k(waves.k_u_rad_per_m[p], face.spacing_m[0]);
      const double kv = lattice_k(waves.k_v_rad_per_m[q], face.spacing_m[1]);
      const FaceMedium medium = medium_of(face);
      const NormalFlux flux = normal_flux(
          medium, normal_wavenumber(medium, -ku * ku - kv * kv, face.spacing_m[2]), face.spacing_m[2]);
      sum +=
          std::norm(waves.te_out(p, q)) * flux.te_outgoing - std::norm(waves.te_in(p, q)) * flux.te_returned +
          std::norm(waves.tm_out(p, q)) * flux.tm_outgoing - std::norm(waves.tm_in(p, q)) * flux.tm_returned;
    }
  }
  return sum * area_m2(face, 0);
}

}  // namespace

TEST_CASE("The direct sum of power is the plane waves' power on every face", "[plane_power]") {
  TestFace face;
  face.periodic = {true, true};
  face.side = GENERATE(Side::x_lo, Side::x_hi, Side::y_lo, Side::y_hi, Side::z_lo, Side::z_hi);
  const bool with_return = GENERATE(false, true);
  CAPTURE(name_of(face.side), with_return);
  const WaveSum waves = periodic_waves(face, with_return);
  const auto net = net_power(face.lattice(), audit_face(face, waves), 0);
  REQUIRE(net);
  const double expected = power_by_flux(face, waves);
  CHECK(expected > 0.0);
  CHECK(net->clear_w_s2 ==
        Approx(expected).epsilon(1e-6));  // the audit's sums are stored in single precision
  CHECK(net->whole_w_s2 == Approx(net->clear_w_s2).epsilon(1e-14));
}

TEST_CASE("The direct sum holds in a conducting medium", "[plane_power]") {
  TestFace face;
  face.periodic = {true, true};
  face.medium = {3.0, 1.2, 0.04};
  face.side = GENERATE(Side::y_lo, Side::z_hi);
  const WaveSum waves = periodic_waves(face, false);
  const auto net = net_power(face.lattice(), audit_face(face, waves), 0);
  REQUIRE(net);
  CHECK(net->clear_w_s2 == Approx(power_by_flux(face, waves)).epsilon(1e-6));
}

TEST_CASE("Clear and whole cross-section are told apart", "[plane_power]") {
  TestFace face;
  face.side = GENERATE(Side::x_hi, Side::y_lo);
  const WaveSum waves = one_wave(face, 0.0, 0.0, 1.0, 0.5);
  const auto net = net_power(face.lattice(), audit_face(face, waves), 0);
  REQUIRE(net);
  const FaceMedium medium = medium_of(face);
  const NormalFlux flux =
      normal_flux(medium, normal_wavenumber(medium, 0.0, face.spacing_m[2]), face.spacing_m[2]);
  const double density = flux.te_outgoing + 0.25 * flux.tm_outgoing;
  CHECK(net->clear_w_s2 == Approx(density * area_m2(face, 0)).epsilon(1e-6));
  CHECK(net->whole_w_s2 == Approx(density * area_m2(face, 2 * face.shell_cells)).epsilon(1e-6));
  CHECK(clear_area_m2(face.lattice(), face.side) == Approx(area_m2(face, 0)).epsilon(1e-12));
}

TEST_CASE("Net power needs all four tangential components", "[plane_power]") {
  TestFace face;
  AuditFace audit = audit_face(face, one_wave(face, 0.2, 0.1, 1.0, 1.0));
  SECTION("a plane was not recorded") {
    audit.planes.pop_back();
    CHECK_FALSE(net_power(face.lattice(), audit, 0));
  }
  SECTION("a plane is smaller than the lattice says") {
    audit.planes.back().sums.pop_back();
    CHECK_THROWS_AS(net_power(face.lattice(), audit, 0), std::invalid_argument);
  }
  SECTION("a frequency that is not there") {
    CHECK_THROWS_AS(net_power(face.lattice(), audit, 1), std::invalid_argument);
  }
}

TEST_CASE("The incident wave's power is what the direct sum reads of that wave alone", "[plane_power]") {
  // An oblique wave with one period across u and two across v; its direction is that of its wavevector.
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = {40, 90};
  face.medium = {1.7, 1.0, 0.0};
  face.side = GENERATE(Side::x_lo, Side::y_hi, Side::z_hi);
  Eigen::ArrayXd k_u(1), k_v(1);
  k_u[0] = 2.0 * pi / (40.0 * face.spacing_m[0]);
  k_v[0] = -4.0 * pi / (90.0 * face.spacing_m[1]);
  WaveSum wave = WaveSum::zero(k_u, k_v);
  wave.te_out(0, 0) = 0.8;
  wave.tm_out(0, 0) = 0.3;
  const VectorWave vectors = vector_wave(face, k_u[0], k_v[0], 0.8, 0.3, true);
  const double e_size =
      std::sqrt(std::norm(vectors.e[0]) + std::norm(vectors.e[1]) + std::norm(vectors.e[2]));

  AuditRecord audit;
  audit.frequencies_hz = {face.frequency_hz};
  audit.faces = {audit_face(face, wave)};
  audit.incident_v_s_per_m = {std::polar(e_size, 1.2)};
  audit.incident_impedance_ohm = eta0_ohm / std::sqrt(1.7);
  const double k = std::sqrt(k_u[0] * k_u[0] + k_v[0] * k_v[0] + std::norm(vectors.k_normal));
  const auto set = [&](Axis a, double value) {
    audit.incident_direction[static_cast<std::size_t>(index_of(a))] = value / k;
  };
  set(face.u(), k_u[0]);
  set(face.v(), k_v[0]);
  set(face.normal(), vectors.k_normal.real());

  const auto incident = incident_power_w_s2(face.lattice(), audit, audit.faces[0], 0);
  const auto net = net_power(face.lattice(), audit.faces[0], 0);
  REQUIRE(incident);
  CHECK(*incident == Approx(net->clear_w_s2).epsilon(1e-6));
  // Second order away from |E|^2 cos / (2 eta) area: percents at 12 cells a wavelength, not tens of percents.
  const double cosine = std::abs(vectors.k_normal.real()) / k;
  CHECK(*incident ==
        Approx(e_size * e_size * cosine * area_m2(face, 0) / (2.0 * audit.incident_impedance_ohm))
            .epsilon(0.06));

  audit.incident_direction[static_cast<std::size_t>(index_of(face.normal()))] = 0.0;
  CHECK_FALSE(incident_power_w_s2(face.lattice(), audit, audit.faces[0], 0));
  audit.incident_v_s_per_m.clear();
  CHECK_FALSE(incident_power_w_s2(face.lattice(), audit, audit.faces[0], 0));
}
