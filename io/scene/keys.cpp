// Every key of the scene language is declared once, here and in the files beside this one: name, form,
// default, range and one sentence.
#include "io/scene/keys.hpp"

#include "io/scene/forms.hpp"

namespace wanewall::scene {
namespace {

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

const Block& run() {
  static const Block b{
      "run",
      "How the run is carried out. Nothing here changes a result.",
      {with_default("threads", whole(0, 4096), "0", "Threads; 0 takes one per processor."),
       with_default("schedule", words({"plain", "fused", "tiles"}), "tiles",
                    "Order in which rows are visited; plain is the slow reference. Tiles become fused "
                    "where x and y are both periodic."),
       optional("tiles", list_of(whole(1, 100000), 3, 3),
                "Tile size of the tiled schedule: rows along x, rows along y, steps (at most 32). "
                "Without it the fastest is found by trying while the run goes on, and "
                "remembered on this machine."),
       with_default("pin", yes_no(), "true",
                    "Keeps each thread on a processor of its own when the run has as many "
                    "threads as there are processors.")},
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
      {derived("title", text(), "the file's name", "What the scene shows."),
       required("band", list_of(above_zero(Family::frequency), 2, 2),
                "Lowest and highest frequency of the results."),
       required("clear_volume", block(clear_volume()), "What you want to look at."),
       required("mesh", block(mesh()), "The cells and the time step."),
       with_default("precision", words({"single", "double"}), "single", "Storage of the fields."),
       with_default("background", name(), "vacuum", "The medium where no object is."),
       optional("media", named(block(medium_block())), "The media of the scene; vacuum is always there."),
       optional("objects", list_of(block(object_block()), 0, 10000),
                "What stands in the scene; a later object covers an earlier one."),
       optional("illumination", block(illumination_block()), "What lights the scene."),
       optional("shell", block(shell_block()), "What ends the lattice."),
       required("stop", block(stop()), "When the run ends."),
       optional("record", block(record_block()), "What is kept of the run."),
       optional("run", block(run()), "How the run is carried out.")},
      {},
      {},
      {},
      {}};
  return b;
}

}  // namespace wanewall::scene
