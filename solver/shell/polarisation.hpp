// The two polarisations of waves at a face.
#pragma once

#include <array>
#include <cstddef>

namespace wanewall {

/// te: E has no component along the face's normal; tm: H has none.
enum class Polarisation { te, tm };
inline constexpr std::array<Polarisation, 2> both_polarisations{Polarisation::te, Polarisation::tm};
constexpr std::size_t index_of(Polarisation p) {
  return static_cast<std::size_t>(p);
}

}  // namespace wanewall
