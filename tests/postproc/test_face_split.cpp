#include "postproc/face_split.hpp"

#include <Eigen/LU>
#include <catch2/catch.hpp>
#include <cmath>
#include <stdexcept>

#include "tests/postproc/lattice_fields.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

const std::vector<SplitPower>& bins_of(const FaceSplit& split, Polarisation p) {
  return split.bins[index_of(p)];
}

double all_outgoing(const FaceSplit& split) {
  return split.totals[0].outgoing + split.totals[1].outgoing;
}

// Wave number (p, q) of the periodic cross-section, coming back with complex ratios.
WaveSum periodic_wave(const TestFace& face, int p, int q, Complex te_ratio, Complex tm_ratio) {
  Eigen::ArrayXd k_u(1), k_v(1);
  k_u[0] = 2.0 * pi * p / (face.clear_cells[0] * face.spacing_m[0]);
  k_v[0] = 2.0 * pi * q / (face.clear_cells[1] * face.spacing_m[1]);
  WaveSum wave = WaveSum::zero(k_u, k_v);
  wave.te_out(0, 0) = Complex{0.9, 0.2};
  wave.tm_out(0, 0) = Complex{-0.4, 0.5};
  wave.te_in(0, 0) = te_ratio * wave.te_out(0, 0);
  wave.tm_in(0, 0) = tm_ratio * wave.tm_out(0, 0);
  return wave;
}

TestFace periodic_face() {
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = {48, 55};
  return face;
}

// A face about six wavelengths wide.
TestFace wide_face() {
  TestFace face;
  face.clear_cells = {90, 75};
  return face;
}

}  // namespace

TEST_CASE("On a periodic cross-section single waves are split to rounding", "[face_split]") {
  TestFace face = periodic_face();
  face.side = GENERATE(Side::x_lo, Side::x_hi, Side::y_lo, Side::y_hi, Side::z_lo, Side::z_hi);
  const auto [p, q] = GENERATE(table<int, int>({{0, 0}, {1, 0}, {0, -2}, {2, 1}, {-2, 2}, {3, 0}}));
  CAPTURE(name_of(face.side), p, q);
  const WaveSum wave = periodic_wave(face, p, q, 0.0, 0.0);
  const FaceSplit split = split_of(face, wave);

  const double ku = lattice_k(wave.k_u_rad_per_m[0], face.spacing_m[0]);
  const double kv = lattice_k(wave.k_v_rad_per_m[0], face.spacing_m[1]);
  const double theta_deg = std::asin(std::hypot(ku, kv) / face.w_per_m()) * 180.0 / pi;
  const auto bin = static_cast<std::size_t>(theta_deg / 10.0);
  const FaceMedium medium = medium_of(face);
  const NormalFlux flux = normal_flux(
      medium, normal_wavenumber(medium, -ku * ku - kv * kv, face.spacing_m[2]), face.spacing_m[2]);
  const double area = 48 * face.spacing_m[0] * 55 * face.spacing_m[1];
  const double te = std::norm(wave.te_out(0, 0)) * flux.te_outgoing * area;
  const double tm = std::norm(wave.tm_out(0, 0)) * flux.tm_outgoing * area;

  // At normal incidence TE and TM are names for the two axes, and y faces list them in the other order.
  if (p != 0 || q != 0) {
    CHECK(bins_of(split, Polarisation::te)[bin].outgoing == Approx(te).epsilon(1e-12));
    CHECK(bins_of(split, Polarisation::tm)[bin].outgoing == Approx(tm).epsilon(1e-12));
  }
  CHECK(all_outgoing(split) == Approx(te + tm).epsilon(1e-12));
  for (Polarisation pol : both_polarisations) {
    const SplitPower& total = split.totals[index_of(pol)];
    CHECK(total.returned < 1e-24 * total.outgoing);
    CHECK(total.floor < 1e-22 * total.outgoing);
  }
}

TEST_CASE("A known reflection is read to rounding on a periodic cross-section", "[face_split]") {
  TestFace face = periodic_face();
  face.side = GENERATE(Side::x_hi, Side::y_lo, Side::z_lo);
  const Complex te_ratio = std::polar(1e-3, 0.7), tm_ratio = std::polar(0.3, -2.0);
  const FaceSplit split = split_of(face, periodic_wave(face, 2, 1, te_ratio, tm_ratio));
  const SplitPower &te = split.totals[0], &tm = split.totals[1];
  CHECK(te.returned / te.outgoing == Approx(1e-6).epsilon(1e-9));
  CHECK(tm.returned / tm.outgoing == Approx(0.09).epsilon(1e-12));
}

TEST_CASE("A conducting medium is split with its own complex wavenumbers", "[face_split]") {
  TestFace face = periodic_face();
  face.medium = {2.2, 1.0, 0.05};
  face.side = GENERATE(Side::z_hi, Side::x_lo);
  const WaveSum wave = periodic_wave(face, 1, -2, 0.2, 0.1);
  const FaceSplit split = split_of(face, wave);
  const SplitPower &te = split.totals[0], &tm = split.totals[1];
  CHECK(te.floor < 1e-22 * te.outgoing);
  // E is 0.2 and 0.1 of the outgoing E on plane 0; H, half a cell further out, has grown for one and decayed
  // for the other.
  const double ku = lattice_k(wave.k_u_rad_per_m[0], face.spacing_m[0]);
  const double kv = lattice_k(wave.k_v_rad_per_m[0], face.spacing_m[1]);
  const FaceMedium medium = medium_of(face);
  const NormalFlux flux = normal_flux(
      medium, normal_wavenumber(medium, -ku * ku - kv * kv, face.spacing_m[2]), face.spacing_m[2]);
  CHECK(te.returned / te.outgoing == Approx(0.04 * flux.te_returned / flux.te_outgoing).epsilon(1e-10));
  CHECK(tm.returned / tm.outgoing == Approx(0.01 * flux.tm_returned / flux.tm_outgoing).epsilon(1e-10));
  // The outgoing wave alone: the direct sum gives the same power.
  const WaveSum outgoing = periodic_wave(face, 1, -2, 0.0, 0.0);
  CHECK(all_outgoing(split_of(face, outgoing)) == Approx(all_outgoing(split)).epsilon(1e-12));
}

TEST_CASE("Cross-sections of a single periodic cell work", "[face_split]") {
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = GENERATE(std::array<int, 2>{1, 1}, std::array<int, 2>{1, 60}, std::array<int, 2>{2, 3});
  face.side = GENERATE(Side::z_hi, Side::y_lo);
  const FaceSplit split = split_of(face, periodic_wave(face, 0, 0, 0.2, 0.2));
  CHECK((split.totals[0].returned + split.totals[1].returned) / all_outgoing(split) ==
        Approx(0.04).epsilon(1e-10));
}

TEST_CASE("The largest wave of an even period counts once", "[face_split]") {
  // Four cells a period in a medium so dense that even the alternating wave travels.
  TestFace face;
  face.periodic = {true, true};
  face.clear_cells = {4, 1};
  face.medium = {40.0, 1.0, 0.0};
  face.dt_s = 1e-11;
  const WaveBasis basis = tapered_plane_waves(face.lattice(), face.side, medium_of(face));
  REQUIRE(basis.plane_wave_per_m[0].size() == 4);
  const FaceSplit split = split_of(face, periodic_wave(face, 2, 0, 0.0, 0.0));
  const double area = 4 * face.spacing_m[0] * face.spacing_m[1];
  const FaceMedium medium = medium_of(face);
  const double k = 2.0 / face.spacing_m[0];
  const NormalFlux flux =
      normal_flux(medium, normal_wavenumber(medium, -k * k, face.spacing_m[2]), face.spacing_m[2]);
  CHECK(split.totals[0].outgoing == Approx(0.85 * area * flux.te_outgoing).epsilon(1e-12));
}

TEST_CASE("All six faces read the same field alike", "[face_split]") {
  TestFace face = wide_face();
  face.clear_cells = {40, 33};
  face.side = Side::z_hi;
  const TestSource source{TestSource::Kind::beam, 1.3, 0.2, 0.1, 30.0};
  const FaceSplit reference = split_of(face, waves_of(face, source));
  face.side = GENERATE(Side::x_lo, Side::x_hi, Side::y_lo, Side::y_hi, Side::z_lo);
  CAPTURE(name_of(face.side));
  const FaceSplit split = split_of(face, waves_of(face, source));
  // Exactly normal waves go to the other polarisation on y faces, so compare sums of both there.
  for (std::size_t bin = 0; bin < 9; ++bin) {
    for (std::size_t pol : {0u, 1u}) {
      if (bin == 0) continue;
      const SplitPower &a = reference.bins[pol][bin], &b = split.bins[pol][bin];
      CHECK(b.outgoing == Approx(a.outgoing).epsilon(1e-9));
      CHECK(b.returned == Approx(a.returned).epsilon(1e-9));
      CHECK(b.floor == Approx(a.floor).epsilon(1e-9));
    }
    CHECK(split.bins[0][bin].outgoing + split.bins[1][bin].outgoing ==
          Approx(reference.bins[0][bin].outgoing + reference.bins[1][bin].outgoing).epsilon(1e-9));
  }
}

TEST_CASE("Under the taper a uniform wave has the power of the clear cross-section", "[face_split]") {
  const TestFace face = wide_face();
  const FaceSplit split = split_of(face, one_wave(face, 0.0, 0.0, 1.0, 1.0));
  const FaceMedium medium = medium_of(face);
  const NormalFlux flux =
      normal_flux(medium, normal_wavenumber(medium, 0.0, face.spacing_m[2]), face.spacing_m[2]);
  const double area = 90 * face.spacing_m[0] * 75 * face.spacing_m[1];
  CHECK(all_outgoing(split) == Approx(2.0 * area * flux.te_outgoing).epsilon(0.02));
}

TEST_CASE("The basis can be replaced", "[face_split]") {
  // Standing waves along the first axis in place of plane waves: even and odd sums of k and -k, which share
  // their eigenvalue. The split must not care.
  const TestFace face = wide_face();
  const WaveSum waves = waves_of(face, {TestSource::Kind::beam, 1.3, 0.0, 0.1, 40.0});
  const FaceMedium medium = medium_of(face);
  const WaveBasis plane_waves = tapered_plane_waves(face.lattice(), face.side, medium);
  WaveBasis standing = plane_waves;
  for (auto& component : standing.parts) {
    AxisBasis& axis = component[0];
    const Eigen::Index n = axis.expand.rows();
    Matrix mix = Matrix::Zero(n, n);
    for (Eigen::Index p = 0; p < n; ++p) {
      mix(p, p) = p > n - 1 - p ? -1.0 : 1.0;
      mix(p, n - 1 - p) = 1.0;
    }
    axis.expand = Matrix(mix * axis.expand);
    axis.to_plane_waves = Matrix(axis.to_plane_waves * mix.inverse());
  }
  const FacePlanes planes = planes_of(face, waves);
  const FaceSplit a = split_planes(planes, face.side, face.spacing_m[2], medium, plane_waves);
  const FaceSplit b = split_planes(planes, face.side, face.spacing_m[2], medium, standing);
  for (std::size_t pol : {0u, 1u}) {
    for (std::size_t bin = 0; bin < 9; ++bin) {
      CHECK(b.bins[pol][bin].outgoing == Approx(a.bins[pol][bin].outgoing).epsilon(1e-10));
      CHECK(b.bins[pol][bin].returned == Approx(a.bins[pol][bin].returned).epsilon(1e-10));
      CHECK(b.bins[pol][bin].floor == Approx(a.bins[pol][bin].floor).epsilon(1e-10));
    }
  }
}

TEST_CASE("Faces that cannot be split say why", "[face_split]") {
  TestFace face;
  AuditFace audit = audit_face(face, one_wave(face, 0.1, 0.0, 1.0, 1.0));
  CHECK(no_split_because(face.lattice(), AuditRecord{}, audit).empty());

  audit.is_uniform = false;
  audit.is_layered = true;
  CHECK_THAT(no_split_because(face.lattice(), AuditRecord{}, audit), Catch::Contains("layers"));
  audit.is_layered = audit.clear_is_uniform = false;
  CHECK_THAT(no_split_because(face.lattice(), AuditRecord{}, audit), Catch::Contains("object"));
  audit.is_uniform = audit.clear_is_uniform = true;

  Lattice narrow = face.lattice();
  narrow.shell_cells[static_cast<std::size_t>(index_of(Side::x_lo))] = 30;
  CHECK_THAT(no_split_because(narrow, AuditRecord{}, audit), Catch::Contains("clear cells along x"));
  CHECK_THROWS_AS(tapered_plane_waves(narrow, audit.side, medium_of(face)), std::invalid_argument);

  Lattice graded = face.lattice();
  std::vector<double> nodes = graded.along(Axis::y).all_m();
  nodes.back() += 0.001;
  graded.lines[1] = MeshLines(nodes);
  CHECK_THAT(no_split_because(graded, AuditRecord{}, audit), Catch::Contains("along y"));

  AuditFace incomplete = audit;
  incomplete.planes.erase(incomplete.planes.begin());
  CHECK_THROWS_AS(face_planes(face.lattice(), incomplete, 0), std::invalid_argument);
}
