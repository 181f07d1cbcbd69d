// What a good scene becomes.
#include <catch2/catch.hpp>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <set>
#include <string>
#include <vector>

#include "geometry/constants.hpp"
#include "io/errors.hpp"
#include "io/scene.hpp"
#include "io/scene/declaration.hpp"

using namespace wanewall;
namespace fs = std::filesystem;

namespace {

const std::string folder = std::string(WANEWALL_SOURCE_DIR) + "/tests/io/good_scenes/";

Scene good(const std::string& name) {
  return read_scene(folder + name);
}

const std::string graded = "every_face: {kind: cfs_pml, profile: polynomial}";

/// A scene of 40^3 cells of 1 cm with room for more; its layers are polynomials of 10 cells unless it says
/// otherwise.
Scene plain(const std::string& more, const std::string& mesh = "{cell: 1 cm}") {
  return parse_scene(
      "band: [1 GHz, 2 GHz]\n"
      "clear_volume: {x: [-20 cm, 20 cm], y: [-20 cm, 20 cm], z: [-20 cm, 20 cm]}\n"
      "stop: {at: 20 ns}\nmesh: " +
          mesh + "\n" + more +
          (more.find("shell:") == std::string::npos ? "shell: {" + graded + "}\n" : std::string()),
      "plain.yaml", ".");
}

const std::string wave_from_above = "illumination: {plane_wave: {from: {theta: 0 deg}}}\n";

bool warns(const Scene& scene, const std::string& text) {
  return std::any_of(scene.warnings.begin(), scene.warnings.end(),
                     [&](const std::string& warning) { return warning.find(text) != std::string::npos; });
}

const UsedValue* used(const Scene& scene, const std::string& path) {
  for (const UsedValue& value : scene.used)
    if (value.path == path) return &value;
  return nullptr;
}

}  // namespace

TEST_CASE("The drum scene becomes a lattice, media, objects, shell and record") {
  const Scene scene = good("drum.yaml");
  const Problem& p = scene.problem;
  CHECK(scene.title == "Steel drum under dry snow");
  CHECK(scene.band_lo_hz == 4e8);
  CHECK(scene.band_hi_hz == 1.6e9);
  // 1.6 m, 1.6 m and 1.3 m of 10 mm cells, 10 cells of shell on each side and 14 below.
  CHECK(p.lattice.cells() == Index3{180, 180, 154});
  CHECK(p.lattice.shell(Side::z_lo) == 14);
  CHECK(p.lattice.shell(Side::z_hi) == 10);
  CHECK(p.lattice.along(Axis::z).node_m(14) == Approx(-0.9).margin(1e-12));
  CHECK(p.lattice.along(Axis::x).node_m(90) == Approx(0.0).margin(1e-12));
  CHECK(p.lattice.dt_s == Approx(0.99 * 0.01 / (c0_m_per_s * std::sqrt(3.0))).epsilon(1e-12));
  CHECK(p.precision == Precision::single_precision);
  REQUIRE(p.media.size() == 4);
  CHECK(p.media[0].name == "vacuum");
  CHECK(p.media[2].permittivity_rel == 4.5);
  CHECK(p.media[2].conductivity_s_per_m == 0.002);
  CHECK(p.media[3].perfect_electric);
  REQUIRE(p.objects.size() == 3);
  CHECK(std::get<HalfSpace>(p.objects[0].shape).at_m == -0.5);
  CHECK(std::get<HalfSpace>(p.objects[0].shape).below);
  CHECK(std::get<Layer>(p.objects[1].shape).lo_m == -0.5);
  CHECK(std::get<Cylinder>(p.objects[2].shape).radius_m == 0.12);
  CHECK(p.objects[2].label == "objects[2] (cylinder)");
  CHECK(p.objects[2].medium == 3);
  REQUIRE(p.plane_wave);
  CHECK(p.plane_wave->box_lo == Index3{16, 16, 20});
  CHECK(p.plane_wave->box_hi == Index3{164, 164, 138});
  CHECK(p.plane_wave->box_face == std::array<bool, 6>{true, true, true, true, true, true});
  CHECK(p.plane_wave->pulse.centre_hz == 1e9);
  CHECK(p.stop.at_s == Approx(60e-9));
  CHECK(p.stop.energy_below_db == -60.0);
  CHECK(p.recording.points[0].position_m == Vec3{0.0, 0.0, 0.1});
  REQUIRE(p.recording.snapshots.size() == 1);
  CHECK(p.recording.snapshots[0].normal == Axis::y);
  CHECK(p.recording.snapshots[0].components ==
        std::vector<Component>{Component::ex, Component::ey, Component::ez});
  CHECK(p.recording.snapshots[0].every == 20);
  CHECK(p.recording.snapshots[0].lo_m[0] == Approx(-0.8));
  CHECK(p.recording.audit.frequencies_hz.size() == 9);
  CHECK(p.recording.audit.frequencies_hz[1] == Approx(5.5e8));
  CHECK(p.recording.audit.frequencies_hz[8] == Approx(1.6e9));
  CHECK(p.recording.audit.faces == std::array<bool, 6>{true, true, true, true, true, true});
}

TEST_CASE("A face takes from every_face what it does not say itself") {
  const Problem p = good("wave.yaml").problem;
  const auto sigma = [&](Side side) { return p.face(side).layer.sigma_e_s_per_m; };
  const auto last_u = [](int cells) { return (cells - 1.0) / cells; };
  // sigma_max of its own instead of the shell's goal; order and the rest from every_face.
  CHECK(p.face(Side::x_lo).layer.cells() == 12);
  CHECK(sigma(Side::x_lo).back() == Approx(0.5 * std::pow(last_u(12), 3.5)));
  CHECK(p.face(Side::x_lo).layer.kappa_e.back() == Approx(1.0 + std::pow(last_u(12), 3.5)));
  CHECK(p.face(Side::x_lo).layer.alpha_e_s_per_m.front() == Approx(1e-3));
  // R(0) of its own, with sigma_max = -(m + 1) ln R / (2 eta L) (J.-P. Berenger, J. Comput. Phys. 114, 185
  // (1994)).
  const double r0 = std::pow(10.0, -50.0 / 20.0);
  CHECK(sigma(Side::x_hi).back() ==
        Approx(-3.0 * std::log(r0) / (2.0 * eta0_ohm * 0.09) * std::pow(last_u(9), 2.0)));
  // The goal of the shell where nothing else is said.
  const double goal = std::pow(10.0, -70.0 / 20.0);
  CHECK(sigma(Side::y_lo).back() ==
        Approx(-4.5 * std::log(goal) / (2.0 * eta0_ohm * 20 * 0.0075) * std::pow(last_u(20), 3.5)));
  CHECK(p.face(Side::y_lo).kind == FaceKind::matched_slab);
  CHECK(p.face(Side::y_lo).layer.kappa_e.back() == 1.0);
  CHECK(p.face(Side::y_lo).layer.alpha_e_s_per_m.front() == 0.0);
  CHECK(p.face(Side::z_lo).layer.alpha_e_s_per_m.front() == 0.0);
  CHECK(p.face(Side::z_hi).layer.cells() == 8);
}

TEST_CASE("A face's own reflection or sigma_max goes before that of every face") {
  const auto sigma_max = [](const std::string& shell, Side side) {
    const Problem p = plain(wave_from_above + "shell: " + shell + "\n").problem;
    return p.face(side).layer.sigma_e_s_per_m.back() / std::pow(0.9, 3.0);
  };
  const double for_50_db = -4.0 * std::log(std::pow(10.0, -50.0 / 20.0)) / (2.0 * eta0_ohm * 0.1);
  const std::string own_reflection =
      "{goal: -20 dB, every_face: {kind: cfs_pml, sigma_max: 7 S/m}, faces: {x-: {reflection: -50 dB}}}";
  CHECK(sigma_max(own_reflection, Side::x_lo) == Approx(for_50_db));
  CHECK(sigma_max(own_reflection, Side::x_hi) == Approx(7.0));
  const std::string own_sigma =
      "{goal: -20 dB, every_face: {kind: cfs_pml, reflection: -50 dB}, faces: {x-: {sigma_max: 7 S/m}}}";
  CHECK(sigma_max(own_sigma, Side::x_lo) == Approx(7.0));
  CHECK(sigma_max(own_sigma, Side::x_hi) == Approx(for_50_db));
}

TEST_CASE("A layer without goal, reflection or sigma_max follows the rule for its cell and background") {
  const Problem p = plain("background: oil\nmedia: {oil: {permittivity: 2.25}}\n" + wave_from_above).problem;
  // S. D. Gedney, IEEE Trans. Antennas Propag. 44, 1630 (1996): 0.8 (m + 1) / (eta0 d sqrt(eps_r)).
  const double sigma_max = 0.8 * 4.0 / (eta0_ohm * 0.01 * 1.5);
  CHECK(p.face(Side::x_lo).layer.sigma_e_s_per_m.back() == Approx(sigma_max * std::pow(0.9, 3.0)));
  CHECK(p.face(Side::x_lo).layer.alpha_e_s_per_m.front() == Approx(2.0 * pi * eps0_f_per_m * 1e9 / 5.0));
}

TEST_CASE("Layers without a word are moebius, 6 cells in single and 8 in double precision") {
  for (const bool in_double : {false, true}) {
    const Scene scene = parse_scene(
        std::string(
            "band: [1 GHz, 2 GHz]\nclear_volume: {x: [0 m, 20 cm], y: [0 m, 20 cm], z: [0 m, 20 cm]}\n"
            "mesh: {cell: 1 cm}\nstop: {at: 5 ns}\n") +
            (in_double ? "precision: double\n" : "") + wave_from_above,
        "cube.yaml", ".");
    const int cells = in_double ? 8 : 6;
    for (Side side : all_sides) {
      CHECK(scene.problem.face(side).kind == FaceKind::moebius);
      CHECK(scene.problem.face(side).moebius.cells() == cells);
      CHECK(scene.problem.lattice.shell(side) == cells);
    }
    CHECK(scene.problem.lattice.cells() == Index3{20 + 2 * cells, 20 + 2 * cells, 20 + 2 * cells});
    // Surface 6 cells inside the clear volume, counted with the shell; the origin is the shell's first node.
    CHECK(scene.problem.plane_wave->box_lo[1] == cells + 6);
    CHECK(scene.problem.plane_wave->box_hi[1] == cells + 14);
    CHECK(scene.problem.lattice.along(Axis::y).node_m(cells) == Approx(0.0).margin(1e-12));
    CHECK(scene.designs[0].figures->mean_db < -70.0);
  }
}

TEST_CASE("A goal gives each face the fewest cells that meet it, and more where an object is near") {
  const auto scene_for = [](const std::string& goal) {
    return parse_scene(
        "band: [1 GHz, 2 GHz]\nclear_volume: {x: [0 m, 30 cm], y: [0 m, 20 cm], z: [0 m, 20 cm]}\n"
        "mesh: {cell: 1 cm}\nprecision: double\nstop: {at: 5 ns}\n"
        "media: {metal: {perfect_conductor: true}, wax: {permittivity: 4}}\n"
        "objects:\n  - half_space: {medium: wax, below: {z: 8 cm}}\n"
        "  - box: {medium: metal, from: [1 cm, 8 cm, 9 cm], to: [12 cm, 12 cm, 12 cm]}\n"
        "illumination: {dipoles: [{electric: [0 A m, 0 A m, 1 A m], at: [15 cm, 10 cm, 15 cm]}], pulse: "
        "{fits: "
        "band}}\n"
        "shell: {goal: " +
            goal + "}\n",
        "goal.yaml", ".");
  };
  const Scene weak = scene_for("-40 dB"), strong = scene_for("-70 dB");
  for (Side side : all_sides) {
    const auto s = static_cast<std::size_t>(index_of(side));
    CHECK(weak.problem.face(side).cells() < strong.problem.face(side).cells());
    REQUIRE(strong.designs[s].figures);
    CHECK(strong.designs[s].figures->mean_db <= -80.0);
    // One cell less does not do.
    const DesignFigures fewer =
        design_moebius(*strong.designs[s].inputs, strong.problem.face(side).cells() - 1, 0.01).figures;
    CHECK(fewer.mean_db > -80.0);
  }
  const auto& faces = strong.surroundings.faces;
  CHECK(faces[0].clearance_cells == Approx(1.0));
  CHECK(faces[0].nearest == "objects[1] (box)");
  // The wax runs through the sides and so does not stand in front of them; z- sees the box above it.
  CHECK(faces[1].clearance_cells == Approx(15.0));
  CHECK(faces[1].nearest == "dipoles[0]");
  CHECK(faces[4].nearest == "objects[1] (box)");
  CHECK(faces[4].clearance_cells == Approx(9.0));
  CHECK(faces[5].clearance_cells == Approx(5.0));
  // Media at the faces: vacuum and wax at the sides, wax below, vacuum above.
  CHECK(faces[0].media == std::vector<int>{0, 2});
  CHECK(faces[4].media == std::vector<int>{2});
  CHECK(faces[5].media == std::vector<int>{0});
  CHECK(strong.designs[4].inputs->frequencies.front().index == Approx(2.0));
  CHECK(strong.designs[5].inputs->frequencies.front().index == Approx(1.0));
  CHECK(warns(strong, "objects[1] (box) stands 1 cells from x-"));
  // The pulse's top: 12 dB down at 2 GHz from a centre of 1.5 GHz, so 80 dB down sqrt(80/12) times as far
  // out.
  CHECK(strong.surroundings.top_frequency_hz == Approx(1.5e9 + 0.5e9 * std::sqrt(80.0 / 12.0)).epsilon(0.01));
  CHECK(strong.surroundings.diagonal_m == Approx(std::sqrt(0.09 + 0.04 + 0.04)));
  CHECK_FALSE(strong.surroundings.has_statics);
}

TEST_CASE("Listed tables, one-way walls and overrides are taken as they stand") {
  const Scene scene = good("shell.yaml");
  const Problem& p = scene.problem;
  CHECK(p.face(Side::x_lo).moebius.kappa == std::vector<double>{5.0, 0.5, 0.1});
  CHECK(p.face(Side::x_lo).moebius.sigma_s_per_m == std::vector<double>{0.1, 0.4, 2.0});
  CHECK(p.face(Side::x_lo).moebius.alpha_s_per_m[2] == Approx(0.3));
  CHECK(p.face(Side::x_hi).moebius.kappa == std::vector<double>{1.0, 1.0});
  CHECK(p.face(Side::x_hi).moebius.alpha_s_per_m == std::vector<double>{0.0, 0.0});
  CHECK(p.face(Side::y_lo).layer.kappa_h == std::vector<double>{1.0, 1.7, 3.0});
  CHECK(p.face(Side::y_hi).layer.sigma_h_s_per_m[0] == Approx(0.05));
  CHECK(p.face(Side::y_hi).layer.kappa_e == std::vector<double>{1.0, 1.0});
  CHECK(p.face(Side::z_lo).one_way_order == 2);
  CHECK(p.face(Side::z_hi).one_way_order == 1);
  CHECK(p.lattice.cells() == Index3{25, 25, 20});
  CHECK(scene.designs[0].inputs->clearance_cells == 4.0);
  CHECK(scene.designs[0].inputs->diagonal_cells == Approx(30.0));
  CHECK(scene.designs[0].inputs->frequencies.front().index == 1.5);
  CHECK(scene.designs[0].inputs->frequencies.front().wavelength_cells == Approx(c0_m_per_s / 3e9 / 0.01));
  CHECK(warns(scene, "x+ is not sure to meet the goal of -40.0 dB"));
}

TEST_CASE("A column of single cells between periodic faces is lit through one face") {
  const Scene scene = good("column.yaml");
  const Problem& p = scene.problem;
  CHECK(p.lattice.cells() == Index3{1, 1, 70});
  CHECK(p.lattice.periodic == std::array<bool, 3>{true, true, false});
  // One-dimensional Courant limit: c0 dt = d.
  CHECK(p.lattice.dt_s == Approx(0.005 / c0_m_per_s).epsilon(1e-12));
  CHECK(p.face(Side::z_lo).kind == FaceKind::electric_wall);
  CHECK(p.plane_wave->box_face == std::array<bool, 6>{false, false, false, false, false, true});
  CHECK(p.plane_wave->box_lo == Index3{0, 0, 0});
  CHECK(p.plane_wave->box_hi == Index3{1, 1, 54});
  CHECK(p.recording.audit.frequencies_hz.empty());
  // Samples: shifted by the delay, scaled to unit peak.
  const Pulse& pulse = p.plane_wave->pulse;
  REQUIRE(pulse.kind == Pulse::Kind::samples);
  CHECK(pulse.sample_time_s.front() == Approx(1e-9));
  CHECK(pulse.sample_time_s.back() == Approx(5e-9));
  double peak = 0.0;
  for (double v : pulse.sample_value) peak = std::max(peak, std::abs(v));
  CHECK(peak == 1.0);
  CHECK(scene.warnings.empty());
}

TEST_CASE("A column between absorbing ends lets the wave in at one end and out at the other") {
  const std::string sides =
      "x-: {kind: periodic}, x+: {kind: periodic}, y-: {kind: periodic}, y+: {kind: periodic}";
  const Problem down = plain(wave_from_above + "shell: {" + graded + ", faces: {" + sides + "}}\n").problem;
  CHECK(down.plane_wave->box_face == std::array<bool, 6>{false, false, false, false, false, true});
  CHECK(down.plane_wave->box_lo == Index3{0, 0, 10});
  CHECK(down.plane_wave->box_hi == Index3{40, 40, 44});
  const Problem up = plain("illumination: {plane_wave: {from: {theta: 180 deg}}}\nshell: {" + graded +
                           ", faces: {" + sides + "}}\n")
                         .problem;
  CHECK(up.plane_wave->box_face == std::array<bool, 6>{false, false, false, false, true, false});
  CHECK(up.plane_wave->box_lo == Index3{0, 0, 16});
  CHECK(up.plane_wave->box_hi == Index3{40, 40, 50});
}

TEST_CASE("One periodic axis leaves the surface open only along it") {
  const Problem p = plain(
                        "illumination: {plane_wave: {from: {theta: 30 deg, phi: 90 deg}}}\n"
                        "shell: {" +
                        graded + ", faces: {x-: {kind: periodic}, x+: {kind: periodic}}}\n")
                        .problem;
  CHECK(p.plane_wave->box_face == std::array<bool, 6>{false, false, true, true, true, true});
  CHECK(p.plane_wave->box_lo == Index3{0, 16, 16});
  CHECK(p.plane_wave->box_hi == Index3{40, 44, 44});
}

TEST_CASE("A wall straight ahead between periodic sides leaves the surface open there") {
  const std::string sides =
      "x-: {kind: periodic}, x+: {kind: periodic}, y-: {kind: periodic}, y+: {kind: periodic}";
  for (const std::string kind : {"electric_wall", "magnetic_wall"}) {
    const Problem p =
        plain(wave_from_above + "shell: {" + graded + ", faces: {" + sides + ", z-: {kind: " + kind + "}}}\n")
            .problem;
    CHECK(p.plane_wave->box_face == std::array<bool, 6>{false, false, false, false, false, true});
    CHECK(p.plane_wave->box_lo == Index3{0, 0, 0});
    CHECK(p.lattice.cells() == Index3{40, 40, 50});
  }
  CHECK_THROWS_AS(
      plain(wave_from_above + "shell: {" + graded + ", faces: {" + sides + ", z+: {kind: electric_wall}}}\n"),
      SceneError);
}

TEST_CASE("Unequal cells, turned box, clamped positions, chosen audit") {
  const Problem p = good("wave.yaml").problem;
  CHECK(p.lattice.cells() == Index3{40 + 12 + 9, 40 + 20 + 20, 40 + 9 + 8});
  const double d[] = {0.01, 0.0075, 0.005};
  CHECK(p.lattice.dt_s ==
        Approx(0.9 / (c0_m_per_s * std::sqrt(1 / (d[0] * d[0]) + 1 / (d[1] * d[1]) + 1 / (d[2] * d[2]))))
            .epsilon(1e-12));
  const Box box = std::get<Box>(p.objects[0].shape);
  CHECK(box.turn_rad == Approx(pi / 4));
  CHECK(box.turn_axis == Vec3{0.0, 1.0, 0.0});
  CHECK(p.plane_wave->peak_v_per_m == 2000.0);
  CHECK(p.plane_wave->e_angle_rad == 0.5);
  CHECK(p.plane_wave->pulse.delay_s == Approx(4e-9));
  CHECK(p.recording.audit.frequencies_hz == std::vector<double>{1e9, 1.25e9});
  CHECK(p.recording.audit.faces == std::array<bool, 6>{true, false, false, false, false, true});
  CHECK(p.recording.audit.sample_every == 4);
  CHECK(p.recording.energy_every == 25);
  CHECK(p.threads == 2);
  CHECK(p.schedule == Schedule::plain);
  CHECK(p.tiles == TileShape{24, 12, 6});
  CHECK_FALSE(p.pin_threads);
  CHECK(p.background == 1);
  REQUIRE(p.recording.snapshots.size() == 4);
  CHECK(p.recording.snapshots[0].components == std::vector<Component>{Component::ey, Component::hz});
  CHECK(p.recording.snapshots[2].components.size() == 6);
  CHECK_FALSE(p.recording.snapshots[3].normal.has_value());
  CHECK(p.recording.snapshots[3].lo_m == Vec3{-0.05, -0.05, -0.05});
  CHECK(p.recording.snapshots[3].hi_m == Vec3{0.05, 0.05, 0.05});
  CHECK(p.recording.snapshots[3].stride == 3);
}

TEST_CASE("Pulses by width, by peak frequency and by default") {
  const Problem ricker = good("dipoles.yaml").problem;
  // The spectrum of a Ricker pulse, w^2 exp(-w^2 tau^2 / 2), is largest at w = sqrt(2) / tau.
  CHECK(ricker.dipoles[0].pulse.width_s == Approx(std::sqrt(2.0) / (2.0 * pi * 0.7e9)));
  CHECK(ricker.dipoles[0].pulse.delay_s == Approx(7.0 * ricker.dipoles[0].pulse.width_s));
  CHECK(ricker.dipoles[0].moment == Vec3{0.0, 0.0, 1e-3});
  CHECK_FALSE(ricker.dipoles[0].is_magnetic);
  CHECK(ricker.dipoles[1].is_magnetic);
  CHECK(ricker.dipoles[1].moment == Vec3{1.0, 0.0, 0.0});
  const Problem fitted = good("bare.yaml").problem;
  CHECK(fitted.plane_wave->pulse.kind == Pulse::Kind::modulated_gaussian);
  CHECK(fitted.plane_wave->pulse.centre_hz == 1.5e8);
}

TEST_CASE("Lengths may miss whole cells by rounding and no more") {
  const auto lattice_of = [](const std::string& x) {
    return parse_scene("band: [1 GHz, 2 GHz]\nclear_volume: {x: " + x +
                           ", y: [0 cm, 20 cm], z: [0 cm, 20 cm]}\nstop: {at: 5 ns}\nmesh: {cell: 1 cm}\n" +
                           "illumination: {plane_wave: {from: {theta: 0 deg}}}\nshell: {" + graded + "}\n",
                       "x", ".")
        .problem.lattice;
  };
  CHECK(lattice_of("[0 cm, 20.0000009 cm]").cells(Axis::x) == 40);
  CHECK(lattice_of("[-0.1 m, 0.2 m]").cells(Axis::x) == 50);
  CHECK_THROWS_AS(lattice_of("[0 cm, 20.0000011 cm]"), SceneError);
}

TEST_CASE("Warnings tell what is doubtful") {
  const std::string media =
      "media: {glass: {permittivity: 4}, oil: {permittivity: 9}, brass: {conductivity: 1 MS/m}, "
      "steel: {perfect_conductor: true}}\n";
  const auto with = [&](const std::string& object) {
    return plain(media + "objects:\n  - " + object + "\n" + wave_from_above);
  };
  CHECK(warns(with("sphere: {medium: glass, centre: [0 m, 0 m, 0 m], radius: 5 cm}"),
              "only 7.49 cells per wavelength in glass at 2 GHz"));
  CHECK(warns(with("sphere: {medium: brass, centre: [0 m, 0 m, 0 m], radius: 5 cm}"),
              "brass is a conductor at 2 GHz"));
  // A ball of 2 mm in the middle of a cell holds no edge of 1 cm cells; one of 8 mm does.
  CHECK(warns(with("sphere: {medium: steel, centre: [5 mm, 5 mm, 5 mm], radius: 2 mm}"), "holds no edge"));
  CHECK_FALSE(
      warns(with("sphere: {medium: steel, centre: [5 mm, 5 mm, 5 mm], radius: 8 mm}"), "holds no edge"));
  // A plate without thickness on mesh lines is seen, one between them is not.
  CHECK_FALSE(warns(with("box: {medium: steel, from: [-5 cm, -5 cm, 0 cm], to: [5 cm, 5 cm, 0 cm]}"),
                    "holds no edge"));
  CHECK(warns(with("box: {medium: steel, from: [-5 cm, -5 cm, 2 mm], to: [5 cm, 5 cm, 2 mm]}"),
              "holds no edge"));
  CHECK(warns(with("sphere: {medium: steel, centre: [18 cm, 0 m, 0 m], radius: 2 cm}"), "does not light it"));
  CHECK(warns(with("sphere: {medium: steel, centre: [0 m, 0 m, 0 m], radius: 2 cm}"),
              "nothing is made of media.oil"));
  CHECK(warns(plain(media + "objects:\n  - sphere: {medium: steel, centre: [0 m, 0 m, 0 m], radius: 2 cm}\n"),
              "nothing lights the scene"));
}

TEST_CASE("A pulse that misses the band, the run or the mesh is a warning") {
  const auto with = [](const std::string& pulse) {
    return plain("illumination: {dipoles: [{electric: [1 A m, 0 A m, 0 A m], at: [0 m, 0 m, 0 m]}], pulse: " +
                 pulse + "}\n");
  };
  CHECK(with("{fits: band}").warnings.empty());
  // A Gaussian of 0.2 GHz about 1 GHz: at 2 GHz it is exp(-25/2) of its peak, which is -108.6 dB.
  CHECK(warns(with("{modulated_gaussian: {centre: 1 GHz, width: 0.7957747 ns}}"),
              "at 2 GHz its spectrum is 109 dB below its peak"));
  CHECK(warns(with("{fits: band, delay: 19.9 ns}"), "after the run ends at 20 ns"));
  CHECK(warns(with("{gaussian: {width: 100 ps}}"), "has a mean"));
  CHECK_FALSE(warns(with("{ricker: {width: 100 ps}}"), "has a mean"));
  CHECK(warns(with("{ricker: {width: 20 ps}}"), "4 cells per wavelength"));
}

TEST_CASE("A wave over layers must come straight down, and straight down it may") {
  const std::string ground =
      "media: {soil: {permittivity: 4, conductivity: 1 mS/m}}\nobjects:\n"
      "  - half_space: {medium: soil, below: {z: -10 cm}}\n";
  CHECK_NOTHROW(plain(ground + wave_from_above));
  CHECK_THROWS_AS(plain(ground + "illumination: {plane_wave: {from: {theta: 10 deg}}}\n"), SceneError);
  // Ground that stays below the surface is no obstacle: the surface ends at z = -14 cm.
  CHECK_NOTHROW(
      plain("media: {soil: {permittivity: 4, conductivity: 1 mS/m}}\nobjects:\n"
            "  - half_space: {medium: soil, below: {z: -17 cm}}\n"
            "illumination: {plane_wave: {from: {theta: 10 deg}}}\n"));
  // A layer covered again on the surface does no harm either.
  CHECK_NOTHROW(plain(ground + "  - half_space: {medium: vacuum, below: {z: 1 m}}\n" +
                      "illumination: {plane_wave: {from: {theta: 10 deg}}}\n"));
}

TEST_CASE("Every value of a scene is listed with where it comes from") {
  const Scene scene = good("drum.yaml");
  REQUIRE(used(scene, "mesh.cell") != nullptr);
  CHECK(used(scene, "mesh.cell")->value == "10 mm");
  CHECK_FALSE(used(scene, "mesh.cell")->by_default);
  REQUIRE(used(scene, "shell.faces.z-.cells") != nullptr);
  CHECK(used(scene, "shell.faces.z-.cells")->value == "14");
  CHECK(used(scene, "shell.faces.x+.cells")->value == "10");
  CHECK(used(scene, "shell.faces.x+.order")->by_default);
  CHECK(used(scene, "objects[1].layer.z")->value == "[-0.5 m, 0 m]");
  CHECK(used(scene, "illumination.plane_wave.surface_inset")->value == "6 cells");
  CHECK(used(scene, "illumination.plane_wave.surface_inset")->by_default);
  CHECK(used(scene, "precision")->value == "single");
  std::set<std::string> paths;
  for (const UsedValue& value : scene.used) {
    INFO(value.path);
    CHECK(paths.insert(value.path).second);  // each once
    CHECK_FALSE(value.value.empty());
  }
  const Scene bare = good("bare.yaml");
  REQUIRE(used(bare, "illumination.pulse.fits") != nullptr);
  CHECK(used(bare, "illumination.pulse.fits")->by_default);
  CHECK(used(bare, "record.shell_audit.frequencies")->by_default);
}

namespace {

/// A used path with names and numbers taken out: "media.oil.permittivity" -> "media.*.permittivity".
std::string pattern_of(const std::string& path) {
  std::vector<std::string> parts(1);
  for (const char c : path) {
    if (c == '.')
      parts.emplace_back();
    else
      parts.back() += c;
  }
  std::string pattern;
  for (std::size_t i = 0; i < parts.size(); ++i) {
    std::string part = parts[i].substr(0, parts[i].find('['));
    const std::string before = i > 0 ? parts[i - 1] : "";
    if (before == "media" || before == "points" || before == "planes" || before == "volumes" ||
        before == "faces")
      part = "*";
    pattern += (i > 0 ? "." : "") + part;
  }
  return pattern;
}

void declared_patterns(const scene::Block& block, const std::string& path, std::set<std::string>& patterns);

void declared_patterns(const scene::Form& form, const std::string& path, std::set<std::string>& patterns) {
  using Kind = scene::Form::Kind;
  switch (form.kind) {
    case Kind::block:
      return declared_patterns(*form.block, path, patterns);
    case Kind::named:
      return declared_patterns(form.of[0], path + ".*", patterns);
    case Kind::list:
      if (form.of[0].kind == Kind::block) return declared_patterns(form.of[0], path, patterns);
      break;
    case Kind::either:
      for (const scene::Form& one : form.of) declared_patterns(one, path, patterns);
      return;
    default:
      break;
  }
  patterns.insert(path);
}

void declared_patterns(const scene::Block& block, const std::string& path, std::set<std::string>& patterns) {
  for (const scene::Key& key : block.keys) {
    if (key.name == "every_face") continue;  // told face by face
    const std::string name = path == "shell.faces" ? "*" : key.name;
    declared_patterns(key.form, path.empty() ? name : path + "." + name, patterns);
  }
}

}  // namespace

TEST_CASE("Every declared key is read: the good scenes together give each of them") {
  std::set<std::string> declared, given;
  declared_patterns(scene::scene_block(), "", declared);
  for (const auto& entry : fs::directory_iterator(folder)) {
    if (entry.path().extension() != ".yaml") continue;
    for (const UsedValue& value : read_scene(entry.path().string()).used)
      if (!value.by_default) given.insert(pattern_of(value.path));
  }
  CHECK(declared.size() > 80);
  for (const std::string& pattern : declared) {
    INFO(pattern);
    CHECK(given.count(pattern) == 1);
  }
  for (const std::string& pattern : given) {
    INFO(pattern);
    CHECK(declared.count(pattern) == 1);
  }
}

TEST_CASE("A scene file that cannot be read is named with the reason") {
  CHECK_THROWS_AS(read_scene("/no/such/scene.yaml"), FileError);
  CHECK_THROWS_WITH(read_scene("/no/such/scene.yaml"),
                    Catch::Contains("/no/such/scene.yaml: reading the scene: No such file"));
  CHECK_THROWS_AS(read_scene(folder), FileError);
  CHECK_THROWS_AS(
      plain("illumination: {plane_wave: {from: {theta: 0 deg}}, pulse: {samples: {file: none.csv}}}\n"),
      FileError);
}
