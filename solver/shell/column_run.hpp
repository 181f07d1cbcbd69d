// A face's reflection read from the march itself: one mode of a guide that ends in the face.
//
// The guide lies between two electric walls across one axis and is periodic, one cell deep, along the third.
// Its first mode is a pair of plane waves of the lattice at sin(theta) = K_t/K, so a face can be read at any
// angle with one mode and no taper. Two runs, with the face and with a guide so long that nothing returns,
// give the wave that comes and the one that goes back; the running Fourier sum over a transient that has died
// is exact. Normal incidence uses a column of one cell.
#pragma once

#include <complex>

#include "solver/problem.hpp"
#include "solver/shell/lattice_reflection.hpp"

namespace wanewall {

struct ColumnRequest {
  Face face;
  Medium medium{"vacuum", 1.0, 1.0, 0.0, 0.0, false, false};  ///< lossless; fills guide and layer
  Axis along = Axis::z;                                       ///< the face's normal
  Axis across = Axis::x;   ///< the axis between the electric walls; another one
  bool high = true;        ///< the face is at the high end
  double cell_m = 1e-3;    ///< along the normal
  double across_m = 0.0;   ///< along `across`; 0: as along the normal
  double dt_s = 0.0;       ///< 0: 0.99 of the limit of a cube of such cells
  double angle_rad = 0.0;  ///< 0 <= angle < pi/2
  /// The guide is a whole number of cells wide, so the frequency is the nearest that fits the angle.
  double cells_per_wavelength = 20.0;
  Polarisation polarisation = Polarisation::te;
};

struct ColumnReading {
  std::complex<double> reflection;  ///< of tangential E, referred to the face's node
  FaceWave wave;                    ///< for face_reflection()
  double dt_s = 0.0;
  double cells_per_wavelength = 0.0;  ///< of the frequency used, in the medium
  long steps = 0;
};

/// Marches both runs in double precision on one thread. Throws std::invalid_argument for angles out of range
/// or a lossy medium.
ColumnReading read_column(const ColumnRequest& request);

}  // namespace wanewall
