// Exact lattice fields on the audit planes of a face: sums of plane waves that travel outwards and come back.
// E and H follow from K x E = Omega mu H and K.E = 0 with three-dimensional vectors in the lattice's own
// axes, so nothing here shares a formula with the split under test but the lattice relation itself.
#pragma once

#include <Eigen/Core>
#include <cmath>
#include <complex>
#include <vector>

#include "geometry/constants.hpp"
#include "geometry/lattice.hpp"
#include "postproc/audit_planes.hpp"
#include "postproc/face_split.hpp"
#include "solver/results.hpp"

namespace wanewall::test {

using Complex = std::complex<double>;
using Matrix = Eigen::MatrixXcd;

struct TestMedium {
  double permittivity_rel = 1.0;
  double permeability_rel = 1.0;
  double conductivity_s_per_m = 0.0;
};

/// One face of a box seen in its own axes: u, v tangential with u x v = outward-or-inward normal w, cyclic.
struct TestFace {
  Side side = Side::z_hi;
  std::array<int, 2> clear_cells{32, 24};                   ///< along u = next(normal), v = previous(normal)
  std::array<double, 3> spacing_m{1.0e-2, 1.2e-2, 0.9e-2};  ///< along u, v, normal
  std::array<bool, 2> periodic{false, false};
  int shell_cells = 3;
  double dt_s = 1.6e-11;
  TestMedium medium;
  double frequency_hz = 2.0e9;

  Axis normal() const { return axis_of(side); }
  Axis u() const { return next(normal()); }
  Axis v() const { return previous(normal()); }

  Lattice lattice() const {
    Lattice made;
    made.dt_s = dt_s;
    const std::array<Axis, 3> axes{u(), v(), normal()};
    for (std::size_t i = 0; i < 3; ++i) {
      const bool is_periodic = i < 2 && periodic[i];
      const int shell = is_periodic ? 0 : shell_cells;
      const int clear = i < 2 ? clear_cells[i] : 10;
      const auto a = static_cast<std::size_t>(index_of(axes[i]));
      made.lines[a] = MeshLines::uniform(-0.37 * spacing_m[i], spacing_m[i], clear + 2 * shell);
      made.periodic[a] = is_periodic;
      made.shell_cells[static_cast<std::size_t>(index_of(side_of(axes[i], false)))] = shell;
      made.shell_cells[static_cast<std::size_t>(index_of(side_of(axes[i], true)))] = shell;
    }
    return made;
  }
  /// Node plane m of the face: plane 2 at the shell's first node.
  int node(int m) const {
    const int last = shell_cells + (is_high(side) ? 10 : 0);
    return is_high(side) ? last - 2 + m : last + 2 - m;
  }
  Complex w2_per_m2() const {
    const double x = pi * frequency_hz * dt_s, omega = 2.0 / dt_s * std::sin(x);
    const Complex y{medium.conductivity_s_per_m * std::cos(x),
                    omega * eps0_f_per_m * medium.permittivity_rel};
    return Complex{0.0, -1.0} * omega * mu0_h_per_m * medium.permeability_rel * y;
  }
  double w_per_m() const { return std::sqrt(w2_per_m2()).real(); }
};

/// Amplitudes on a grid of transverse wavevectors [wave along u][wave along v]; te and tm are the tangential
/// E at node plane 0 [V s/m], out the outgoing wave and in the incoming one.
struct WaveSum {
  Eigen::ArrayXd k_u_rad_per_m, k_v_rad_per_m;
  Matrix te_out, tm_out, te_in, tm_in;

  static WaveSum zero(Eigen::ArrayXd k_u, Eigen::ArrayXd k_v) {
    WaveSum w{std::move(k_u), std::move(k_v), {}, {}, {}, {}};
    for (Matrix* m : {&w.te_out, &w.tm_out, &w.te_in, &w.tm_in})
      *m = Matrix::Zero(w.k_u_rad_per_m.size(), w.k_v_rad_per_m.size());
    return w;
  }
};

inline double lattice_k(double k, double d) {
  return 2.0 / d * std::sin(0.5 * k * d);
}

/// The true wavenumber whose lattice wavenumber is K.
inline double true_k(double lattice_k_per_m, double d) {
  return 2.0 / d * std::asin(0.5 * lattice_k_per_m * d);
}

/// Vector amplitudes (u, v, normal axis' own direction) of one wave with its origin on node plane 0.
struct VectorWave {
  std::array<Complex, 3> e, h;
  Complex k_normal;  ///< along the normal axis' own direction
};

inline VectorWave vector_wave(const TestFace& face, double k_u, double k_v, Complex te, Complex tm,
                              bool outgoing) {
  const double ku = lattice_k(k_u, face.spacing_m[0]), kv = lattice_k(k_v, face.spacing_m[1]);
  const double kt = std::hypot(ku, kv);
  const double c = kt > 0.0 ? ku / kt : 1.0, s = kt > 0.0 ? kv / kt : 0.0;
  const double d = face.spacing_m[2];
  Complex kn = 2.0 / d * std::asin(0.5 * d * std::sqrt(face.w2_per_m2() - kt * kt));
  if (kn.imag() > 0.0) kn = -kn;
  if (outgoing != is_high(face.side)) kn = -kn;
  const Complex big_kn = 2.0 / d * std::sin(0.5 * d * kn);
  VectorWave wave;
  wave.k_normal = kn;
  wave.e = {c * tm - s * te, s * tm + c * te, 0.0};
  wave.e[2] = -(ku * wave.e[0] + kv * wave.e[1]) / big_kn;
  const double omega_mu = 2.0 / face.dt_s * std::sin(pi * face.frequency_hz * face.dt_s) * mu0_h_per_m *
                          face.medium.permeability_rel;
  wave.h = {(kv * wave.e[2] - big_kn * wave.e[1]) / omega_mu,
            (big_kn * wave.e[0] - ku * wave.e[2]) / omega_mu, (ku * wave.e[1] - kv * wave.e[0]) / omega_mu};
  return wave;
}

/// Values of one component on the plane with this index along the normal: [first][second] in the order x, y,
/// z.
inline Matrix plane_values(const TestFace& face, const WaveSum& waves, Component c, int normal_index) {
  const Lattice lattice = face.lattice();
  const Axis u = face.u(), v = face.v(), n = face.normal();
  const auto which = static_cast<std::size_t>(axis_of(c) == u ? 0 : axis_of(c) == v ? 1 : 2);
  const double from_plane_0_m =
      lattice.position_m(c, n, normal_index) - lattice.along(n).node_m(face.node(0));
  Matrix amplitude(waves.k_u_rad_per_m.size(), waves.k_v_rad_per_m.size());
  for (Eigen::Index q = 0; q < amplitude.cols(); ++q) {
    for (Eigen::Index p = 0; p < amplitude.rows(); ++p) {
      Complex sum = 0.0;
      for (const bool outgoing : {true, false}) {
        const Complex te = outgoing ? waves.te_out(p, q) : waves.te_in(p, q);
        const Complex tm = outgoing ? waves.tm_out(p, q) : waves.tm_in(p, q);
        if (te == 0.0 && tm == 0.0) continue;
        const VectorWave wave =
            vector_wave(face, waves.k_u_rad_per_m[p], waves.k_v_rad_per_m[q], te, tm, outgoing);
        sum += (is_electric(c) ? wave.e : wave.h)[which] *
               std::exp(Complex{0.0, -1.0} * wave.k_normal * from_plane_0_m);
      }
      amplitude(p, q) = sum;
    }
  }
  const auto phases = [&](Axis a, const Eigen::ArrayXd& k) {
    Matrix phase(lattice.stored(c, a).size(), k.size());
    for (Eigen::Index p = 0; p < phase.cols(); ++p)
      for (Eigen::Index i = 0; i < phase.rows(); ++i)
        phase(i, p) = std::polar(1.0, -k[p] * lattice.position_m(c, a, static_cast<int>(i)));
    return phase;
  };
  const Matrix on_uv =
      phases(u, waves.k_u_rad_per_m) * amplitude * phases(v, waves.k_v_rad_per_m).transpose();
  return u < v ? on_uv : Matrix(on_uv.transpose());
}

/// Tangential E on planes 0, 1, 2 and tangential H on half plane 0, as the solver would record them.
inline AuditFace audit_face(const TestFace& face, const WaveSum& waves) {
  AuditFace made;
  made.side = face.side;
  made.permittivity_rel = face.medium.permittivity_rel;
  made.permeability_rel = face.medium.permeability_rel;
  made.conductivity_s_per_m = face.medium.conductivity_s_per_m;
  const auto record = [&](Component c, int normal_index) {
    const Matrix values = plane_values(face, waves, c, normal_index);
    AuditPlane plane;
    plane.component = c;
    plane.normal_index = normal_index;
    plane.normal_m = face.lattice().position_m(c, face.normal(), normal_index);
    plane.shape = {static_cast<int>(values.rows()), static_cast<int>(values.cols())};
    for (Eigen::Index p = 0; p < values.rows(); ++p)
      for (Eigen::Index q = 0; q < values.cols(); ++q) plane.sums.emplace_back(values(p, q));
    made.planes.push_back(std::move(plane));
  };
  for (Axis a : {face.u(), face.v()}) {
    for (int m : {2, 0, 1}) record(electric(a), face.node(m));
    record(magnetic(a), is_high(face.side) ? face.node(0) : face.node(0) - 1);
  }
  return made;
}

/// The same planes in double, for tests to rounding.
inline FacePlanes planes_of(const TestFace& face, const WaveSum& waves) {
  FacePlanes planes;
  for (std::size_t i : {0u, 1u})
    for (int m = 0; m < 3; ++m)
      planes[i][static_cast<std::size_t>(m)] =
          plane_values(face, waves, electric(axes_of(face.side).tangential[i]), face.node(m));
  return planes;
}

inline FaceMedium medium_of(const TestFace& face) {
  return face_medium(face.medium.permittivity_rel, face.medium.permeability_rel,
                     face.medium.conductivity_s_per_m, face.frequency_hz, face.dt_s);
}

inline FaceSplit split_of(const TestFace& face, const WaveSum& waves) {
  Eigen::setNbThreads(1);  // as in the program, where each thread has a split of its own
  const WaveBasis basis = tapered_plane_waves(face.lattice(), face.side, medium_of(face));
  return split_planes(planes_of(face, waves), face.side, face.spacing_m[2], medium_of(face), basis);
}

/// One plane wave at an angle from the normal, turned from u towards v, with tangential amplitudes te and tm
/// [V s/m].
inline WaveSum one_wave(const TestFace& face, double theta_rad, double phi_rad, double te, double tm) {
  const double k_t = face.w_per_m() * std::sin(theta_rad);
  Eigen::ArrayXd k_u(1), k_v(1);
  k_u[0] = true_k(k_t * std::cos(phi_rad), face.spacing_m[0]);
  k_v[0] = true_k(k_t * std::sin(phi_rad), face.spacing_m[1]);
  WaveSum wave = WaveSum::zero(k_u, k_v);
  wave.te_out(0, 0) = te;
  wave.tm_out(0, 0) = tm;
  return wave;
}

/// What a source behind the face sends out: a sum over a grid of wavevectors, so that the source repeats
/// itself every `period_wavelengths`, far outside the face.
struct TestSource {
  enum class Kind {
    dipole,       ///< along u: the waves that travel, faded out at grazing
    near_dipole,  ///< the same with its evanescent waves, and without those right at grazing
    beam,         ///< Gaussian, 0.4 wide in K_t/W
  };
  Kind kind = Kind::dipole;
  double distance_wavelengths = 2.0;  ///< from node plane 0
  double offset_wavelengths = 0.0;    ///< along u from the middle of the clear part
  double returned = 0.0;  ///< amplitude of each incoming wave relative to the outgoing one, on node plane 0
  double period_wavelengths = 60.0;
};

inline WaveSum waves_of(const TestFace& face, const TestSource& source) {
  using Kind = TestSource::Kind;
  const double w = face.w_per_m(), wavelength_m = 2.0 * pi / w, d = face.spacing_m[2];
  const double s_last = source.kind == Kind::near_dipole ? 2.5 : 0.995;
  const int n = static_cast<int>(1.1 * s_last * source.period_wavelengths) + 2;
  const Eigen::ArrayXd k =
      Eigen::ArrayXd::LinSpaced(2 * n + 1, -n, n) * 2.0 * pi / (source.period_wavelengths * wavelength_m);
  WaveSum sum = WaveSum::zero(k, k);
  const Lattice lattice = face.lattice();
  const auto middle_m = [&](Axis a) {
    const IndexRange c = lattice.clear_cells(a);
    return 0.5 * (lattice.along(a).node_m(c.begin) + lattice.along(a).node_m(c.end));
  };
  const double u_m = middle_m(face.u()) + source.offset_wavelengths * wavelength_m, v_m = middle_m(face.v());
  for (Eigen::Index p = 0; p < k.size(); ++p) {
    for (Eigen::Index q = 0; q < k.size(); ++q) {
      const double ku = lattice_k(k[p], face.spacing_m[0]), kv = lattice_k(k[q], face.spacing_m[1]);
      const double s = std::hypot(ku, kv) / w;
      if (s > s_last || std::abs(1.0 - s) < 0.005) continue;
      Complex c = std::sqrt(Complex{1.0 - s * s, 0.0});
      if (c.imag() > 0.0) c = -c;
      const double cos_phi = s > 0.0 ? ku / (s * w) : 1.0, sin_phi = s > 0.0 ? kv / (s * w) : 0.0;
      const Complex kz = 2.0 / d * std::asin(0.5 * d * w * c);
      Complex size = (1.0 - std::pow(s, 8)) / c;
      if (source.kind == Kind::near_dipole)
        size = std::exp(-std::pow(0.5 * s, 8)) * (1.0 - std::exp(-std::pow((1.0 - s) / 0.02, 2))) / c;
      if (source.kind == Kind::beam) size = std::exp(-std::pow(s / 0.4, 2)) / (c * c);
      const Complex phase{0.0, k[p] * u_m + k[q] * v_m};
      const Complex at =
          size * std::exp(phase - Complex{0.0, 1.0} * kz * source.distance_wavelengths * wavelength_m);
      sum.te_out(p, q) = -sin_phi * at;
      sum.tm_out(p, q) = c * c * cos_phi * at;
    }
  }
  sum.te_in = source.returned * sum.te_out;
  sum.tm_in = source.returned * sum.tm_out;
  return sum;
}

}  // namespace wanewall::test
