// Keys of media and objects.
#include "io/scene/forms.hpp"
#include "io/scene/keys.hpp"

namespace wanewall::scene {
namespace {

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

}  // namespace

const Block& medium_block() {
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
      {},
      {},
      {}};
  return b;
}

const Block& object_block() {
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

}  // namespace wanewall::scene
