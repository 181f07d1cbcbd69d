// Where in the plane of normal wavenumbers, and how strongly, a layer's reflection counts in a design.
//
// Units: the cell along the face's normal, d, and c0 = 1; so wavelengths and lengths are in cells, and with
// k0 = 2 pi/wavelength and S = c0 dt/d
//   p = j W,  W = (2/S) tan(k0 S/2),     Omega = (2/S) sin(k0 S/2),     q = j tan(k_n/2) = tanh(gamma/2).
#pragma once

#include <vector>

namespace wanewall {

/// One frequency of a design: cells per wavelength in vacuum, and the largest refractive index that a wave
/// coming to the face can have there.
struct DesignFrequency {
  double wavelength_cells = 0.0;
  double index = 1.0;
  bool operator==(const DesignFrequency&) const = default;
};

/// What a design must know of the scene, for one face.
struct DesignInputs {
  double courant = 0.5;           ///< S = c0 dt/d with d along the normal
  double diagonal_cells = 100.0;  ///< of the clear volume
  double clearance_cells = 3.0;   ///< from the face to the nearest source or object
  double alpha_min = 1e-3;        ///< smallest alpha eta0 d
  std::vector<DesignFrequency> frequencies;
  bool operator==(const DesignInputs&) const = default;
};

/// The points of one frequency, as arrays.
struct DesignPoints {
  double k0 = 0.0, courant = 0.0;
  std::vector<double> q_re, q_im, weight;
};

/// The reflected near field is an integral of R(k_n) along k_n = k0 ... 0 ... -j infinity. R is -1 at k_n = 0
/// whatever the layer, but analytic for q in the first quadrant, so the path may go round that corner at any
/// radius which the rest of the integrand tolerates:
///   delta = sqrt((2)^2 k0/L + (1.5)^2/L^2),  L the clear volume's diagonal.
/// Points, with k = 2 asin(n Omega/2) and h = min((clearance + 1)/2, 3):
///   imaginary q axis   16 log-spaced k_n in [delta, k], weight 1; when k is below 1.05 delta a single one at
///   k,
///                      weight (k/delta)^3, and none below 0.3 delta
///   arc of radius delta   8 points, weight min(1, k/delta)^2
///   real q axis        14 log-spaced gamma in [delta, max(3/h, 2 delta)], weight exp(-2 gamma h)
/// Every lossless index in [1, n] is covered by the interval [delta, k]; in lossy media q lies inside the
/// first quadrant, where ln|R| is subharmonic, so its values on axes and arc bound it.
std::vector<DesignPoints> near_field_points(const DesignInputs& inputs);

/// Plane waves only, in vacuum: angles from 0 to `largest_angle_rad` at log-spaced wavelengths.
std::vector<DesignPoints> plane_wave_points(double courant, double shortest_cells, double longest_cells,
                                            double largest_angle_rad);

/// The effective clearance h above.
double design_clearance(double clearance_cells);
/// The inputs with a clearance that stands for all which a design cannot tell apart from it.
DesignInputs as_designed(DesignInputs inputs);

}  // namespace wanewall
