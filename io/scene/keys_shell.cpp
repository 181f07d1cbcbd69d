// Keys of the shell.
#include "io/scene/forms.hpp"
#include "io/scene/keys.hpp"

namespace wanewall::scene {
namespace {

Form conductivities() {
  return list_of(not_negative(Family::conductivity), 1, 64);
}

const Block& face() {
  static const Block b{
      "every_face, faces.FACE",
      "One face of the shell. A face takes from every_face what it does not say itself. Layers are designed "
      "for "
      "the scene unless tables or, for cfs_pml, a grading are given; a matched slab has neither stretch nor "
      "frequency shift; walls, one-way and periodic faces have no layer.",
      {with_default(
           "kind",
           words({"moebius", "cfs_pml", "matched_slab", "one_way", "electric_wall", "magnetic_wall",
                  "periodic"}),
           "moebius",
           "moebius: layer whose inner face reflects nothing on the lattice; cfs_pml: "
           "complex-frequency-shifted "
           "perfectly matched layer; matched_slab: plain graded lossy slab; one_way: one-way wave equation "
           "on "
           "the wall, no layer; electric_wall: tangential E = 0; magnetic_wall: tangential H = 0; periodic: "
           "joined to the opposite face, which must be periodic too."),
       derived(
           "cells", whole(0, 64),
           "the fewest that meet shell.goal; without a goal 6 in single and 8 in double precision; 10 for "
           "polynomials and matched_slab",
           "Thickness of the layer."),
       derived("profile", words({"searched", "polynomial", "listed"}),
               "listed or polynomial when their keys are given, else searched",
               "cfs_pml only: where its numbers come from."),
       derived("clearance", number({0.0, 1e6, false, false}),
               "to the nearest object or dipole that does not run on through the face; 3 without any",
               "Cells between the face and what stands nearest to it; designs use it."),
       derived("index", number({0.01, 1e4, false, false}),
               "the largest sqrt|eps mu| of the media at the face, at each frequency",
               "Refractive index of the densest medium that runs into the layer; designs use it."),
       optional("sigma", conductivities(),
                "moebius: sigma of each cell, innermost first; with kappa and alpha."),
       optional("kappa", list_of(number({0.0, 1e3, true, false}), 1, 64),
                "moebius: kappa of each cell; else 1."),
       optional("alpha", conductivities(), "moebius: alpha of each cell; else 0."),
       optional("sigma_e", conductivities(),
                "cfs_pml, matched_slab: sigma at each E node, the layer's first node first."),
       optional("sigma_h", conductivities(), "cfs_pml, matched_slab: sigma at each half node."),
       optional("kappa_e", list_of(number({1.0, 1e3, false, false}), 1, 64),
                "cfs_pml: kappa at each E node; else 1."),
       optional("kappa_h", list_of(number({1.0, 1e3, false, false}), 1, 64),
                "cfs_pml: kappa at each half node; else 1."),
       optional("alpha_e", conductivities(), "cfs_pml: alpha at each E node; else 0."),
       optional("alpha_h", conductivities(), "cfs_pml: alpha at each half node; else 0."),
       derived("order", number({0.0, 10.0, false, false}), "3; for one_way 1",
               "Exponent of the polynomial grading of sigma and kappa; for one_way 1 or 2, the order of the "
               "one-way wave equation."),
       derived(
           "reflection", quantity(Family::level, {-300.0, 0.0, false, true}), "shell.goal when that is given",
           "Wanted reflection of a polynomial layer at normal incidence in the continuum, in vacuum; sets "
           "sigma_max."),
       derived(
           "sigma_max", not_negative(Family::conductivity),
           "from reflection; without one, 0.8 (order + 1) / (eta0 cell sqrt(permittivity of the background))",
           "Conductivity at the outer wall of a polynomial layer."),
       with_default("kappa_max", number({1.0, 100.0, false, false}), "1",
                    "Stretch at the outer wall of a polynomial layer."),
       derived("alpha_max", not_negative(Family::conductivity), "2 pi eps0 (low end of the band) / 5",
               "Frequency shift at a polynomial layer's inner face; it lets slow tails decay."),
       with_default("alpha_order", number({0.0, 10.0, false, false}), "1",
                    "Exponent of the grading of alpha.")},
      {},
      {{"reflection", "sigma_max"}},
      {},
      {}};
  return b;
}

const Block& design() {
  static const Block b{
      "design",
      "What the layers are designed for, where it should differ from what the scene says.",
      {derived("diagonal", above_zero(Family::length), "that of the clear volume",
               "Longest way that fields travel beside the shell."),
       derived("top_frequency", above_zero(Family::frequency),
               "where the pulse's spectrum is 80 dB below its peak", "Highest frequency that counts."),
       derived("statics", yes_no(), "true when the pulse has a mean or the run is long",
               "Whether fields that hardly move must be absorbed too; costs a little at other frequencies.")},
      {},
      {},
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
  static const Block b{
      "shell",
      "What ends the lattice.",
      {optional("goal", quantity(Family::level, {-300.0, 0.0, false, true}),
                "What the shell should reflect at most. Designed layers get the fewest cells of "
                "which 10 dB less is expected, 15 dB below -100 dB."),
       optional("design", block(design()), "What the layers are designed for."),
       optional("every_face", block(face()), "What all six faces have in common."),
       optional("faces", block(faces()), "Faces that differ.")},
      {},
      {},
      {},
      {}};
  return b;
}

}  // namespace wanewall::scene
