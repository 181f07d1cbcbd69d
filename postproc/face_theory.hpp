// What a face of the shell should reflect, by its own layer on the lattice.
#pragma once

#include "postproc/face_split.hpp"

namespace wanewall {

/// The theory of the layer that ran on this face, for waves of the medium at its planes; without a function
/// where the kind has none or the record does not say what the layer is made of.
FaceTheory face_theory(const Lattice& lattice, const Face& layer, const AuditFace& face, double frequency_hz);

}  // namespace wanewall
