// Normal incidence on layered ground: the layered lattice wave leaks nothing, whatever the layers.
#include <catch2/catch.hpp>

#include "tests/solver/setup.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

constexpr int size = 20, margin = 6, shell = 8;

Problem ground(bool from_below, int which, Precision precision) {
  const int n = size + 2 * margin + 2 * shell;
  const double d = 10e-3;
  Problem p = vacuum_problem({n, n, n}, {d, d, d});
  p.precision = precision;
  PolynomialGrading grading;
  grading.sigma_max_s_per_m = sigma_max_rule(3.0, d, 1.0);
  grading.alpha_max_s_per_m = 1e-3;
  for (Side s : all_sides) set_face(p, s, FaceKind::cfs_pml, polynomial_layer(grading, shell));
  p.media.push_back({"soil", 4.5, 1.0, 5e-3, 0.0, false, false});
  p.media.push_back({"snow", 1.6, 1.0, 1e-5, 0.0, false, false});
  const double middle = (shell + margin + size / 2) * d;
  if (from_below) {  // the same scene upside down
    p.objects.push_back({HalfSpace{Axis::z, middle, false}, 1, "soil"});
    if (which == 1) p.objects.push_back({Layer{Axis::z, middle - 3 * d, middle}, 2, "snow"});
  } else {
    p.objects.push_back({HalfSpace{Axis::z, middle, true}, 1, "soil"});
    if (which == 1) p.objects.push_back({Layer{Axis::z, middle, middle + 3 * d}, 2, "snow"});
    if (which == 2) p.objects.push_back({Layer{Axis::z, middle - 3.4 * d, middle + 2.3 * d}, 2, "snow"});
  }
  PlaneWave wave;
  wave.theta_rad = from_below ? pi : 0.0;
  wave.e_angle_rad = degrees(30.0);
  wave.pulse = modulated_gaussian_for_band(0.4e9, 1.4e9);
  const int lo = shell + margin, hi = lo + size;
  wave.box_lo = {lo, lo, lo};
  wave.box_hi = {hi, hi, hi};
  p.plane_wave = wave;
  p.stop.at_s = 900 * p.lattice.dt_s;
  return p;
}

/// Largest E outside the box and inside it, relative to the incident peak [dB].
template <class Real>
std::pair<double, double> leakage(const Problem& p) {
  Marcher<Real> marcher(p, 2);
  double outside = 0.0, inside = 0.0;
  for (int n = 0; n < 900; n += 30) {
    marcher.advance(30, {});
    for (Component c : {Component::ex, Component::ey, Component::ez})
      for (int i = shell; i < p.lattice.cells(Axis::x) - shell; ++i)
        for (int j = shell; j < p.lattice.cells(Axis::y) - shell; ++j)
          for (int k = shell; k < p.lattice.cells(Axis::z) - shell; ++k) {
            const Index3 at{i, j, k};
            bool in = true;
            for (Axis a : all_axes) {
              const auto m = static_cast<std::size_t>(index_of(a));
              in = in && at[m] >= p.plane_wave->box_lo[m] &&
                   at[m] < p.plane_wave->box_hi[m] + (is_half(c, a) ? 0 : 1);
            }
            double& worst = in ? inside : outside;
            worst = std::max(worst, std::abs(static_cast<double>(marcher.fields().row(c, i, j)[k])));
          }
  }
  return {db(outside), db(inside)};
}

}  // namespace

TEST_CASE("Layered ground at normal incidence leaks less than -120 dB", "[plane_wave][layers]") {
  const bool from_below = GENERATE(false, true);
  const int which = GENERATE(0, 1, 2);
  if (from_below && which == 2) return;
  const auto [outside, inside] = leakage<double>(ground(from_below, which, Precision::double_precision));
  CAPTURE(from_below, which, outside, inside);
  CHECK(inside > -10.0);
  CHECK(outside < -120.0);
}

TEST_CASE("Layered ground in single precision leaks about as much as its rounding", "[plane_wave][layers]") {
  const auto [outside, inside] = leakage<float>(ground(false, 1, Precision::single_precision));
  CAPTURE(outside, inside);
  CHECK(outside < -95.0);
  CHECK(inside > -10.0);
}

TEST_CASE("What the surface cannot do is refused with the reason", "[plane_wave][errors]") {
  const auto message = [](const Problem& p) {
    try {
      Marcher<double> marcher(p, 1);
    } catch (const ProblemError& e) {
      return std::string(e.what());
    }
    return std::string();
  };
  Problem oblique = ground(false, 0, Precision::double_precision);
  oblique.plane_wave->theta_rad = degrees(20.0);
  CHECK_THAT(message(oblique), Catch::Contains("oblique incidence on layered media"));
  Problem crossing = ground(false, 0, Precision::double_precision);
  crossing.media.push_back({"steel", 1.0, 1.0, 0.0, 0.0, true, false});
  crossing.objects.push_back({Box{{0.1, 0.2, 0.2}, {0.3, 0.25, 0.25}, {0, 0, 1}, 0.0}, 3, "bar"});
  CHECK_THAT(message(crossing), Catch::Contains("crosses the total-field surface"));
  Problem lossy = ground(true, 0, Precision::double_precision);
  lossy.plane_wave->theta_rad = 0.0;  // now it comes through the soil
  CHECK_THAT(message(lossy), Catch::Contains("lossy"));
  Problem coarse = ground(false, 0, Precision::double_precision);
  coarse.objects.clear();
  coarse.plane_wave->pulse = modulated_gaussian_for_band(2e9, 14e9);
  CHECK_THAT(message(coarse), Catch::Contains("shorter than two cells"));
}
