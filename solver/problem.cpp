#include "solver/problem.hpp"

#include <cmath>

#include "solver/results.hpp"

namespace wanewall {

std::string_view name_of(FaceKind kind) {
  constexpr std::array<std::string_view, 7> names{"moebius",       "cfs_pml",       "matched_slab", "one_way",
                                                  "electric_wall", "magnetic_wall", "periodic"};
  return names[static_cast<std::size_t>(kind)];
}

std::string_view name_of(Schedule schedule) {
  constexpr std::array<std::string_view, 3> names{"plain", "fused", "tiles"};
  return names[static_cast<std::size_t>(schedule)];
}

Schedule schedule_named(std::string_view name) {
  for (const Schedule schedule : {Schedule::plain, Schedule::fused, Schedule::tiles})
    if (name_of(schedule) == name) return schedule;
  throw std::logic_error("no schedule is called " + std::string(name));
}

std::string_view name_of(StopReason reason) {
  constexpr std::array<std::string_view, 4> names{"reached its end", "ended because its energy had fallen",
                                                  "was interrupted", "broke off with non-finite fields"};
  return names[static_cast<std::size_t>(reason)];
}

Vec3 propagation_of(const PlaneWave& wave) {
  const double st = std::sin(wave.theta_rad), ct = std::cos(wave.theta_rad);
  Vec3 direction{-st * std::cos(wave.phi_rad), -st * std::sin(wave.phi_rad), -ct};
  // Angles in degrees leave 1e-17 where an axis should be exact; the lattice wave must not carry it.
  for (double& component : direction) {
    if (std::abs(component) < 1e-14) component = 0.0;
  }
  return direction;
}

Vec3 e_direction_of(const PlaneWave& wave) {
  const double st = std::sin(wave.theta_rad), ct = std::cos(wave.theta_rad);
  const double sp = std::sin(wave.phi_rad), cp = std::cos(wave.phi_rad);
  const double a = std::cos(wave.e_angle_rad), b = std::sin(wave.e_angle_rad);
  return {a * ct * cp - b * sp, a * ct * sp + b * cp, -a * st};
}

bool wall_is_electric(const Problem& problem, Side side) {
  const FaceKind kind = problem.face(side).kind;
  return kind == FaceKind::electric_wall || has_layer(kind);
}

long Problem::last_step() const {
  return static_cast<long>(std::ceil(stop.at_s / lattice.dt_s - 1e-9));
}

}  // namespace wanewall
