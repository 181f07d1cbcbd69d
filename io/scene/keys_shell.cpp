// Keys of the shell.
#include "io/scene/forms.hpp"
#include "io/scene/keys.hpp"

namespace wanewall::scene {
namespace {

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

}  // namespace

const Block& shell_block() {
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

}  // namespace wanewall::scene
