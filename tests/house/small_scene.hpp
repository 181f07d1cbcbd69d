// A scene of 26^3 cells for tests of the program as a whole.
#pragma once

#include <fmt/format.h>

#include <string>

namespace wanewall::test {

/// Ends after `end_ns` nanoseconds; a step takes about 9.5 ps.
inline std::string small_scene(double end_ns, const std::string& peak = "1 V/m") {
  return fmt::format(
      "title: small\n"
      "band: [1 GHz, 3 GHz]\n"
      "clear_volume: {{x: [-50 mm, 50 mm], y: [-50 mm, 50 mm], z: [-50 mm, 50 mm]}}\n"
      "mesh: {{cell: 5 mm}}\n"
      "illumination: {{plane_wave: {{from: {{theta: 0 deg}}, peak: {}}}}}\n"
      "shell: {{every_face: {{kind: cfs_pml, profile: polynomial, cells: 3}}}}\n"
      "stop: {{at: {} ns}}\n"
      "record:\n"
      "  planes: {{cut: {{y: 0 m, fields: [Ex], every: 1000 steps}}}}\n"
      "  shell_audit: {{frequencies: 2}}\n",
      peak, end_ns);
}

}  // namespace wanewall::test
