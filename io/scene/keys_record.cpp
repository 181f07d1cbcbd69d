// Keys of what is recorded.
#include "io/scene/forms.hpp"
#include "io/scene/keys.hpp"

namespace wanewall::scene {
namespace {

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

}  // namespace

const Block& record_block() {
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

}  // namespace wanewall::scene
