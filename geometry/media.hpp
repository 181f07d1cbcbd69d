// Media as plain data.
#pragma once

#include <string>

namespace wanewall {

/// A homogeneous, isotropic, linear medium. Relative permittivity and permeability are >= 1 in passive media
/// the time step is made for; conductivities are >= 0.
struct Medium {
  std::string name;
  double permittivity_rel = 1.0;
  double permeability_rel = 1.0;
  double conductivity_s_per_m = 0.0;
  double magnetic_conductivity_ohm_per_m = 0.0;
  bool perfect_electric = false;  ///< tangential E = 0
  bool perfect_magnetic = false;  ///< tangential H = 0

  bool is_perfect() const { return perfect_electric || perfect_magnetic; }
};

}  // namespace wanewall
