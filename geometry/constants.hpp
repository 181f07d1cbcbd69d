// Constants of the vacuum. c0 is exact; mu0 is the CODATA 2018 value (E. Tiesinga et al., Rev. Mod. Phys. 93,
// 025010 (2021)); eps0 follows, so that eps0 mu0 c0^2 = 1 to rounding.
#pragma once

#include <numbers>

namespace wanewall {

inline constexpr double c0_m_per_s = 299792458.0;
inline constexpr double mu0_h_per_m = 1.25663706212e-6;
inline constexpr double eps0_f_per_m = 1.0 / (mu0_h_per_m * c0_m_per_s * c0_m_per_s);
inline constexpr double eta0_ohm = mu0_h_per_m * c0_m_per_s;
inline constexpr double pi = std::numbers::pi;

static_assert(eps0_f_per_m * mu0_h_per_m * c0_m_per_s * c0_m_per_s - 1.0 < 1e-15 &&
              1.0 - eps0_f_per_m * mu0_h_per_m * c0_m_per_s * c0_m_per_s < 1e-15);

}  // namespace wanewall
