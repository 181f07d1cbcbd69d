// Every key of the scene language, once: name, form, default, range and one sentence.
#include <cmath>

#include "geometry/constants.hpp"
#include "io/scene/declaration.hpp"

namespace wanewall::scene {
namespace {

constexpr double no_end = std::numeric_limits<double>::infinity();
constexpr double degree = pi / 180.0;

Form quantity(Family family, Range range = {}) {
  Form form;
  form.kind = Form::Kind::quantity;
  form.family = family;
  form.range = range;
  return form;
}
Form above_zero(Family family) {
  return quantity(family, {0.0, no_end, true, false});
}
Form not_negative(Family family) {
  return quantity(family, {0.0, no_end, false, false});
}
Form number(Range range) {
  Form form;
  form.kind = Form::Kind::number;
  form.range = range;
  return form;
}
Form whole(double lo, double hi) {
  Form form;
  form.kind = Form::Kind::whole;
  form.range = {lo, hi, false, false};
  return form;
}
Form words(std::vector<std::string> list, std::vector<Later> later = {}) {
  Form form;
  form.kind = Form::Kind::word;
  form.words = std::move(list);
  form.later = std::move(later);
  return form;
}
Form text() {
  Form form;
  form.kind = Form::Kind::text;
  form.most = 200;
  return form;
}
Form name() {
  Form form;
  form.kind = Form::Kind::name;
  return form;
}
Form yes_no() {
  Form form;
  form.kind = Form::Kind::yes_no;
  return form;
}
Form list_of(Form entry, std::size_t least, std::size_t most) {
  Form form;
  form.kind = Form::Kind::list;
  form.of = {std::move(entry)};
  form.least = least;
  form.most = most;
  return form;
}
Form block(const Block& of) {
  Form form;
  form.kind = Form::Kind::block;
  form.block = &of;
  return form;
}
Form named(Form entry) {
  Form form;
  form.kind = Form::Kind::named;
  form.of = {std::move(entry)};
  return form;
}
Form either(Form first, Form second) {
  Form form;
  form.kind = Form::Kind::either;
  form.of = {std::move(first), std::move(second)};
  return form;
}

Key required(std::string key_name, Form form, std::string sentence) {
  return {std::move(key_name), std::move(form), true, "", "", std::move(sentence)};
}
Key optional(std::string key_name, Form form, std::string sentence) {
  return {std::move(key_name), std::move(form), false, "", "", std::move(sentence)};
}
Key with_default(std::string key_name, Form form, std::string fallback, std::string sentence) {
  return {std::move(key_name), std::move(form), false, std::move(fallback), "", std::move(sentence)};
}
Key derived(std::string key_name, Form form, std::string rule, std::string sentence) {
  return {std::move(key_name), std::move(form), false, "", std::move(rule), std::move(sentence)};
}

Form position() {
  return list_of(quantity(Family::length), 3, 3);
}
Form length_range() {
  return list_of(quantity(Family::length), 2, 2);
}
Form fields() {
  return list_of(words({"E", "H", "Ex", "Ey", "Ez", "Hx", "Hy", "Hz"}), 1, 8);
}
Form face_names() {
  return list_of(words({"x-", "x+", "y-", "y+", "z-", "z+"}), 1, 6);
}

const Block& clear_volume() {
  static const Block b{
      "clear_volume",
      "What you want to look at; the shell is added outside it. Each length must be a whole number of cells.",
      {required("x", length_range(), "Its two ends along x."),
       required("y", length_range(), "Its two ends along y."),
       required("z", length_range(), "Its two ends along z; +z is up.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& mesh() {
  static const Block b{
      "mesh",
      "The cells and the time step.",
      {required("cell", either(above_zero(Family::length), list_of(above_zero(Family::length), 3, 3)),
                "Edge of a cubic cell, or the three edges of a brick."),
       with_default("courant", number({0.0, 1.0, true, false}), "0.99",
                    "Time step over the largest stable one.")},
      {},
      {},
      {},
      {{"x", "give one cell size per axis in mesh.cell"},
       {"y", "give one cell size per axis in mesh.cell"},
       {"z", "give one cell size per axis in mesh.cell"},
       {"lines", "give one cell size per axis in mesh.cell"}}};
  return b;
}

const Block& medium() {
  static const Block b{
      "media.NAME",
      "A homogeneous medium. A perfect conductor takes no other key.",
      {with_default("permittivity", number({1.0, 1e6, false, false}), "1", "Relative permittivity."),
       with_default("permeability", number({1.0, 1e6, false, false}), "1", "Relative permeability."),
       with_default("conductivity", not_negative(Family::conductivity), "0 S/m", "Electric conductivity."),
       with_default("magnetic_conductivity", not_negative(Family::magnetic_conductivity), "0 ohm/m",
                    "Magnetic loss, the dual of the conductivity."),
       with_default("perfect_conductor", yes_no(), "false", "Tangential E is zero on it."),
       with_default("perfect_magnetic_conductor", yes_no(), "false", "Tangential H is zero on it.")},
      {},
      {{"perfect_conductor", "perfect_magnetic_conductor"}},
      {},
      {}};
  return b;
}

const Block& turn() {
  static const Block b{
      "turn",
      "A turn of the box about its centre, by the right-hand rule.",
      {with_default("axis", list_of(number({}), 3, 3), "[0, 0, 1]",
                    "Direction of the axis of the turn; its length does not matter."),
       required("angle", quantity(Family::angle, {-360 * degree, 360 * degree, false, false}),
                "How far to turn.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& box() {
  static const Block b{
      "box",
      "A box between two opposite corners. One extent may be zero: a thin plate on the mesh.",
      {required("medium", name(), "What it is made of."), required("from", position(), "One corner."),
       required("to", position(), "The opposite corner."),
       optional("turn", block(turn()), "Turns the box about its centre.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& sphere() {
  static const Block b{
      "sphere",
      "A ball.",
      {required("medium", name(), "What it is made of."), required("centre", position(), "Its centre."),
       required("radius", above_zero(Family::length), "Its radius.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& cylinder() {
  static const Block b{
      "cylinder",
      "A solid cylinder with flat ends between two points.",
      {required("medium", name(), "What it is made of."), required("from", position(), "Centre of one end."),
       required("to", position(), "Centre of the other end."),
       required("radius", above_zero(Family::length), "Its radius.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& layer() {
  static const Block b{"layer",
                       "Everything between two planes; it runs on through the shell.",
                       {required("medium", name(), "What it is made of."),
                        optional("x", length_range(), "Its two faces, for a layer across x."),
                        optional("y", length_range(), "Its two faces, for a layer across y."),
                        optional("z", length_range(), "Its two faces, for a layer across z.")},
                       {{"x", "y", "z"}},
                       {},
                       {},
                       {}};
  return b;
}

const Block& plane_position() {
  static const Block b{"below, above",
                       "The plane that ends a half-space.",
                       {optional("x", quantity(Family::length), "Position of a plane across x."),
                        optional("y", quantity(Family::length), "Position of a plane across y."),
                        optional("z", quantity(Family::length), "Position of a plane across z.")},
                       {{"x", "y", "z"}},
                       {},
                       {},
                       {}};
  return b;
}

const Block& half_space() {
  static const Block b{"half_space",
                       "Everything on one side of a plane; it runs on through the shell.",
                       {required("medium", name(), "What it is made of."),
                        optional("below", block(plane_position()), "Fills the side of smaller coordinates."),
                        optional("above", block(plane_position()), "Fills the side of larger coordinates.")},
                       {{"below", "above"}},
                       {},
                       {},
                       {}};
  return b;
}

const Block& object() {
  static const Block b{
      "objects[]",
      "One object, of one shape.",
      {optional("box", block(box()), "A box."), optional("sphere", block(sphere()), "A ball."),
       optional("cylinder", block(cylinder()), "A solid cylinder."),
       optional("layer", block(layer()), "Everything between two planes."),
       optional("half_space", block(half_space()), "Everything on one side of a plane.")},
      {{"box", "sphere", "cylinder", "layer", "half_space"}},
      {},
      {},
      {}};
  return b;
}

const Block& direction() {
  static const Block b{
      "from",
      "Where the wave comes from.",
      {required("theta", quantity(Family::angle, {0.0, 180 * degree, false, false}),
                "Angle from +z: 0 deg comes straight down."),
       with_default("phi", quantity(Family::angle, {-360 * degree, 360 * degree, false, false}), "0 deg",
                    "Angle from +x towards +y.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& plane_wave() {
  static const Block b{
      "plane_wave",
      "A plane wave through a closed surface: total field inside it, scattered field outside.",
      {required("from", block(direction()), "Where the wave comes from."),
       with_default("e_angle", quantity(Family::angle, {-360 * degree, 360 * degree, false, false}), "0 deg",
                    "Turns E from the theta unit vector towards the phi unit vector."),
       with_default("peak", above_zero(Family::electric_field), "1 V/m", "Multiplies the pulse."),
       with_default("surface_inset", quantity(Family::cells, {4.0, 10000.0, false, false}), "6 cells",
                    "How far inside the clear volume the surface lies; the planes of the shell audit stay "
                    "outside it.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& dipole() {
  static const Block b{"dipoles[]",
                       "A point dipole; its current is the moment times the pulse.",
                       {optional("electric", list_of(quantity(Family::current_moment), 3, 3),
                                 "Current moment I l along x, y, z."),
                        optional("magnetic", list_of(quantity(Family::voltage_moment), 3, 3),
                                 "Magnetic moment K l along x, y, z."),
                        required("at", position(), "Where it is, inside the clear volume.")},
                       {{"electric", "magnetic"}},
                       {},
                       {},
                       {}};
  return b;
}

const Block& modulated_gaussian() {
  static const Block b{"modulated_gaussian",
                       "exp(-u^2/2) sin(2 pi centre (t - delay)), u = (t - delay) / width.",
                       {required("centre", above_zero(Family::frequency), "Frequency under the Gaussian."),
                        required("width", above_zero(Family::time), "Standard deviation of the Gaussian.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& gaussian() {
  static const Block b{"gaussian",
                       "exp(-u^2/2), u = (t - delay) / width. It has a mean and leaves charge behind.",
                       {required("width", above_zero(Family::time), "Standard deviation.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& differentiated_gaussian() {
  static const Block b{"differentiated_gaussian",
                       "-u exp((1 - u^2)/2), u = (t - delay) / width.",
                       {required("width", above_zero(Family::time), "Standard deviation.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& ricker() {
  static const Block b{
      "ricker",
      "(1 - u^2) exp(-u^2/2), u = (t - delay) / width.",
      {optional("width", above_zero(Family::time), "Standard deviation of the Gaussian it is derived from."),
       optional("peak_frequency", above_zero(Family::frequency),
                "Where its spectrum is largest: sqrt(2) / (2 pi width).")},
      {{"width", "peak_frequency"}},
      {},
      {},
      {}};
  return b;
}

const Block& samples() {
  static const Block b{
      "samples",
      "A waveform from a file, joined by straight lines, zero outside, scaled to unit peak.",
      {required("file", text(),
                "CSV file beside the scene, two columns: time in s, value; one header line is allowed.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& pulse() {
  static const Block b{
      "pulse",
      "The waveform of all sources.",
      {optional("fits", words({"band"}),
                "A modulated Gaussian that is 12 dB below its peak at both ends of the band."),
       optional("modulated_gaussian", block(modulated_gaussian()), "A Gaussian times a sine; no mean."),
       optional("gaussian", block(gaussian()), "A Gaussian."),
       optional("differentiated_gaussian", block(differentiated_gaussian()), "Slope of a Gaussian; no mean."),
       optional("ricker", block(ricker()), "Curvature of a Gaussian; no mean."),
       optional("samples", block(samples()), "Samples from a CSV file."),
       derived("delay", not_negative(Family::time), "7 widths; 0 s for samples",
               "Time of the pulse's middle; for samples, how much later they start.")},
      {{"fits", "modulated_gaussian", "gaussian", "differentiated_gaussian", "ricker", "samples"}},
      {},
      {},
      {}};
  return b;
}

const Block& illumination() {
  static const Block b{
      "illumination",
      "What lights the scene.",
      {optional("plane_wave", block(plane_wave()), "A plane wave."),
       optional("dipoles", list_of(block(dipole()), 1, 10000), "Point dipoles."),
       with_default("pulse", block(pulse()), "{fits: band}", "The waveform of all of them.")},
      {},
      {},
      {{"plane_wave", "dipoles"}},
      {}};
  return b;
}

const Block& face() {
  static const Block b{
      "every_face, faces.FACE",
      "One face of the shell. A face takes from every_face what it does not say itself. Walls and periodic "
      "faces have no "
      "layer and take only `kind`; a matched slab has no stretch and no frequency shift.",
      {with_default(
           "kind",
           words({"cfs_pml", "matched_slab", "electric_wall", "magnetic_wall", "periodic"},
                 {{"moebius", "use cfs_pml"}, {"one_way", "use cfs_pml"}}),
           "cfs_pml",
           "cfs_pml: complex-frequency-shifted perfectly matched layer; matched_slab: plain graded lossy "
           "slab; electric_wall: tangential E = 0; magnetic_wall: tangential H = 0; periodic: joined to the "
           "opposite face, which must be periodic too."),
       with_default("cells", whole(0, 64), "10", "Thickness of the layer."),
       with_default("order", number({0.0, 10.0, false, false}), "3",
                    "Exponent of the polynomial grading of sigma and kappa."),
       derived(
           "reflection", quantity(Family::level, {-300.0, 0.0, false, true}), "shell.goal when that is given",
           "Wanted reflection of the layer at normal incidence in the continuum, in vacuum; sets sigma_max."),
       derived(
           "sigma_max", not_negative(Family::conductivity),
           "from reflection; without one, 0.8 (order + 1) / (eta0 cell sqrt(permittivity of the background))",
           "Conductivity at the outer wall."),
       with_default("kappa_max", number({1.0, 100.0, false, false}), "1", "Stretch at the outer wall."),
       derived("alpha_max", not_negative(Family::conductivity), "2 pi eps0 (low end of the band) / 5",
               "Frequency shift at the layer's inner face; it lets slow tails decay."),
       with_default("alpha_order", number({0.0, 10.0, false, false}), "1",
                    "Exponent of the grading of alpha.")},
      {},
      {{"reflection", "sigma_max"}},
      {},
      {}};
  return b;
}

const Block& faces() {
  static const Block b{"faces",
                       "Faces that differ from every_face.",
                       {optional("x-", block(face()), "The face at the low end of x."),
                        optional("x+", block(face()), "The face at the high end of x."),
                        optional("y-", block(face()), "The face at the low end of y."),
                        optional("y+", block(face()), "The face at the high end of y."),
                        optional("z-", block(face()), "The face at the low end of z."),
                        optional("z+", block(face()), "The face at the high end of z.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& shell() {
  static const Block b{"shell",
                       "What ends the lattice.",
                       {optional("goal", quantity(Family::level, {-300.0, 0.0, false, true}),
                                 "What the shell should reflect at most; layers without a reflection of "
                                 "their own are made for it."),
                        optional("every_face", block(face()), "What all six faces have in common."),
                        optional("faces", block(faces()), "Faces that differ.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& stop() {
  static const Block b{
      "stop",
      "When the run ends: at the first of the two.",
      {required("at", above_zero(Family::time), "Time at which the run ends."),
       optional("when_energy_below", quantity(Family::level, {-300.0, 0.0, false, true}),
                "Ends the run once the field energy in the clear volume is this far below its "
                "largest value, after the source has ended.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& plane() {
  static const Block b{
      "planes.NAME",
      "A plane of the clear volume, recorded as the run goes on.",
      {optional("x", quantity(Family::length), "Position of a plane across x."),
       optional("y", quantity(Family::length), "Position of a plane across y."),
       optional("z", quantity(Family::length), "Position of a plane across z."),
       with_default("fields", fields(), "[E]", "Components to record; E and H stand for all three."),
       required("every", quantity(Family::steps, {1.0, 1e9, false, false}),
                "Steps from one record to the next."),
       with_default("stride", whole(1, 1000), "1", "Keeps every stride-th position along each axis.")},
      {{"x", "y", "z"}},
      {},
      {},
      {}};
  return b;
}

const Block& volume() {
  static const Block b{
      "volumes.NAME",
      "A box of the clear volume, recorded as the run goes on.",
      {required("from", position(), "One corner."), required("to", position(), "The opposite corner."),
       with_default("fields", fields(), "[E]", "Components to record; E and H stand for all three."),
       required("every", quantity(Family::steps, {1.0, 1e9, false, false}),
                "Steps from one record to the next."),
       with_default("stride", whole(1, 1000), "1", "Keeps every stride-th position along each axis.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& shell_audit() {
  static const Block b{
      "shell_audit",
      "What the reflection table of the shell is made from.",
      {with_default(
           "frequencies", either(whole(1, 1000), list_of(above_zero(Family::frequency), 1, 1000)), "9",
           "How many frequencies, spread evenly over the band with its ends; or a list of frequencies."),
       derived("faces", face_names(), "all absorbing faces", "Faces to audit; each costs memory."),
       derived("sample_every", quantity(Family::steps, {1.0, 10000.0, false, false}),
               "as rarely as the pulse's spectrum allows",
               "Steps between two samples of the running transform.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& record() {
  static const Block b{
      "record",
      "What is kept of the run.",
      {optional("points", named(position()), "Points where E and H are kept at every step."),
       optional("planes", named(block(plane())), "Planes to record."),
       optional("volumes", named(block(volume())), "Boxes to record."),
       with_default("energy_every", quantity(Family::steps, {1.0, 1e9, false, false}), "50 steps",
                    "Steps between two values of the field energy in the clear volume."),
       with_default("shell_audit", either(words({"off"}), block(shell_audit())), "{frequencies: 9}",
                    "The audit of the shell, or off.")},
      {},
      {},
      {},
      {{"far_field", "remove it; recorded points and planes hold the near field"}}};
  return b;
}

const Block& run() {
  static const Block b{"run",
                       "How the run is carried out. Nothing here changes a result.",
                       {with_default("threads", whole(0, 4096), "0", "Threads; 0 takes one per processor."),
                        with_default("schedule", words({"plain", "fused"}), "fused",
                                     "Order in which rows are visited; plain is the slow reference.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

}  // namespace

const Block& scene_block() {
  static const Block b{
      "scene",
      "A scene file. Positions and directions are in one right-handed frame with +z up.",
      {with_default("title", text(), "untitled", "What the scene shows."),
       required("band", list_of(above_zero(Family::frequency), 2, 2),
                "Lowest and highest frequency of the results."),
       required("clear_volume", block(clear_volume()), "What you want to look at."),
       required("mesh", block(mesh()), "The cells and the time step."),
       with_default("precision", words({"single", "double"}), "single", "Storage of the fields."),
       with_default("background", name(), "vacuum", "The medium where no object is."),
       optional("media", named(block(medium())), "The media of the scene; vacuum is always there."),
       optional("objects", list_of(block(object()), 0, 10000),
                "What stands in the scene; a later object covers an earlier one."),
       optional("illumination", block(illumination()), "What lights the scene."),
       optional("shell", block(shell()), "What ends the lattice."),
       required("stop", block(stop()), "When the run ends."),
       optional("record", block(record()), "What is kept of the run."),
       optional("run", block(run()), "How the run is carried out.")},
      {},
      {},
      {},
      {{"far_field", "remove it; recorded points and planes hold the near field"}}};
  return b;
}

}  // namespace wanewall::scene
