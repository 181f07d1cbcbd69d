// What `wanewall check` prints.
#include <catch2/catch.hpp>
#include <cmath>
#include <string>

#include "geometry/constants.hpp"
#include "io/scene.hpp"
#include "io/scene/build_report.hpp"
#include "io/scene/resolution.hpp"
#include "io/scene/snapshot_size.hpp"
#include "io/terminal.hpp"

using namespace wanewall;

namespace {

Scene cube(const std::string& more) {
  return parse_scene(
      "band: [1 GHz, 2 GHz]\nclear_volume: {x: [-20 cm, 20 cm], y: [-20 cm, 20 cm], z: [-20 cm, 20 cm]}\n"
      "mesh: {cell: 1 cm}\nstop: {at: 20 ns}\n" +
          more,
      "cube.yaml", ".");
}

const std::string light = "illumination: {plane_wave: {from: {theta: 0 deg}}}\n";

bool has(const std::string& text, const std::string& part) {
  return text.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("The continuum reflection of a layer made for a goal is the goal") {
  for (const std::string order : {"1", "2", "3"}) {
    INFO(order);
    const Problem p =
        cube(light + "shell: {goal: -80 dB, every_face: {kind: cfs_pml, cells: 12, order: " + order + "}}\n")
            .problem;
    CHECK(scene::continuum_reflection_db(p, Side::x_lo) == Approx(-80.0).epsilon(1e-6));
  }
  const Problem p =
      cube(light + "shell: {every_face: {kind: cfs_pml, reflection: -50 dB, order: 3.7}}\n").problem;
  CHECK(scene::continuum_reflection_db(p, Side::z_hi) == Approx(-50.0).margin(0.05));
  // A denser background shortens the waves: the same layer absorbs n times as many decibels.
  const Problem oil = cube("media: {oil: {permittivity: 2.25}}\nbackground: oil\n" + light +
                           "shell: {goal: -40 dB, every_face: {kind: cfs_pml, profile: polynomial}}\n")
                          .problem;
  CHECK(scene::continuum_reflection_db(oil, Side::x_lo) == Approx(-60.0).epsilon(1e-6));
}

TEST_CASE("Wavelength and depth in a medium") {
  const scene::WaveIn vacuum = scene::wave_in(Medium{}, 1e9);
  CHECK(vacuum.wavelength_m == Approx(0.299792458));
  CHECK(std::isinf(vacuum.depth_m));
  // Skin depth of a good conductor, sqrt(2 / (omega mu sigma)); copper, 58 MS/m, at 1 GHz: 2.09 um (handbook
  // value, from memory).
  Medium copper;
  copper.conductivity_s_per_m = 58e6;
  CHECK(scene::wave_in(copper, 1e9).depth_m == Approx(2.09e-6).epsilon(0.002));
  CHECK(scene::wave_in(copper, 1e9).depth_m ==
        Approx(std::sqrt(2.0 / (2.0 * pi * 1e9 * mu0_h_per_m * 58e6))).epsilon(1e-6));
  // Low loss: the depth of the field is 2 / (sigma eta).
  Medium soil;
  soil.permittivity_rel = 4.0;
  soil.conductivity_s_per_m = 1e-5;
  CHECK(scene::wave_in(soil, 1e9).depth_m == Approx(2.0 / (1e-5 * eta0_ohm / 2.0)).epsilon(1e-6));
  CHECK(scene::wave_in(soil, 1e9).wavelength_m == Approx(0.299792458 / 2.0).epsilon(1e-6));
  // Magnetic loss is the dual.
  Medium dual;
  dual.permeability_rel = 4.0;
  dual.magnetic_conductivity_ohm_per_m = 1e-5 * eta0_ohm * eta0_ohm;
  CHECK(scene::wave_in(dual, 1e9).depth_m == Approx(scene::wave_in(soil, 1e9).depth_m).epsilon(1e-9));
}

TEST_CASE("Values of all snapshots are counted") {
  const Problem p =
      cube(light +
           "record:\n"
           "  planes: {cut: {z: 0 m, fields: [Ex], every: 100 steps}}\n"
           "  volumes: {box: {from: [0 m, 0 m, 0 m], to: [4 cm, 4 cm, 4 cm], fields: [Hz], every: 1000000 "
           "steps, stride: 2}}\n")
          .problem;
  // 20 ns are 1050 steps of 19.07 ps: steps 0, 100, ..., 1000. Ex: 40 half places and one
  // beyond each end, by 41 nodes.
  // The box, once: Hz has 4 half places and one beyond each end along x and y, and 5 nodes along z; every
  // second one is kept.
  CHECK(scene::snapshot_values(p) == 11.0 * 42 * 41 + 3 * 3 * 3);
}

TEST_CASE("The report tells what will be built") {
  const Scene scene = cube(
      "title: A ball\n"
      "media: {glass: {permittivity: 4}, steel: {perfect_conductor: true}}\n"
      "objects:\n"
      "  - sphere: {medium: glass, centre: [0 m, 0 m, 0 m], radius: 5 cm}\n"
      "  - box: {medium: steel, from: [-5 cm, -5 cm, 8 cm], to: [5 cm, 5 cm, 9 cm]}\n" +
      light +
      "shell: {goal: -60 dB, every_face: {kind: cfs_pml, profile: polynomial}, faces: {x-: {kind: "
      "matched_slab, "
      "cells: 12}, y+: {kind: moebius, cells: 10}}}\n"
      "record: {planes: {cut: {y: 0 m, every: 20 steps}}, shell_audit: {frequencies: 3, faces: [z+]}}\n");
  Footprint footprint;
  footprint.fields = 3e6;
  footprint.media = 1e6;
  footprint.audit = 2e6;
  const std::string text = scene::build_report(scene, footprint, {false, 5e6});
  CAPTURE(text);
  CHECK(text.starts_with("A ball\n  cube.yaml, 1 GHz to 2 GHz\n"));
  CHECK(has(text, "clear volume  40 x 40 x 40 cells, 400 mm x 400 mm x 400 mm"));
  CHECK(has(text, "with shell    62 x 60 x 60 cells, 223200 in all"));
  CHECK(has(text, "time step     19.0657 ps, Courant number 0.99"));
  CHECK(has(text, "steps         at most 1050, to 20 ns"));
  CHECK(has(text, "fields             3.00 MB"));
  CHECK(has(text, "without the audit  4.00 MB"));
  CHECK(has(text, "shell audit        2.00 MB"));
  CHECK(has(text, "total              6.00 MB"));
  CHECK(has(text, "the run needs 6.00 MB and this machine has 5.00 MB"));
  // Vacuum: 299.8 mm and 149.9 mm; glass, n = 2: half of it. Cells of 10 mm.
  CHECK(has(text, "299.8 mm     30"));
  CHECK(has(text, "74.95 mm   7.49"));
  CHECK(has(text, "only 7.49 cells per wavelength in glass at 2 GHz"));
  CHECK(has(text, "steel (perfect conductor)"));
  CHECK(has(text, "from theta 0 deg, phi 0 deg, E turned by 0 deg, peak 1 V/m"));
  CHECK(has(text, "28 x 28 x 28 cells, x -140 mm to 140 mm"));
  CHECK(has(text, "-12.0 dB"));
  CHECK(has(text, "x-    matched_slab     12"));
  CHECK(has(text, "-60.0 dB"));
  CHECK(has(text, "objects[1] (box)     steel   -50 mm to 50 mm  -50 mm to 50 mm  80 mm to 90 mm"));
  CHECK(has(text, "plane y = 0 m, Ex Ey Ez, every 20 steps, stride 1"));
  CHECK(has(text, "3 frequencies from 1 GHz to 2 GHz, faces z+"));
  CHECK_FALSE(has(text, "Values used"));
  const std::string full = scene::build_report(scene, footprint, {true, 0.0});
  CHECK(has(full, "Values used"));
  CHECK(has(full, "shell.faces.x-.cells"));
  CHECK_FALSE(has(full, "this machine"));
  CHECK(has(full, "not known: no such scene has been run here yet"));
  // 1e9 cells a second.
  const double seconds =
      static_cast<double>(scene.problem.last_step()) * scene.problem.lattice.n_cells() * 1e-9;
  scene::ReportOptions timed;
  timed.cells_per_second = 1e9;
  timed.start_seconds = 3600.0;
  const std::string with_time = scene::build_report(scene, footprint, timed);
  CHECK(has(with_time, "about " + duration_text(3600.0 + seconds) + ": " + duration_text(3600.0) +
                           " to start, " + duration_text(seconds) + " of marching at 1 Gcell/s"));
  CHECK_FALSE(has(text, " \n"));
}
