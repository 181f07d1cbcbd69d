// The same problem behind a much thicker shell: what differs between the two is what the shell did.
#pragma once

#include <array>
#include <string>

#include "solver/problem.hpp"

namespace wanewall {

/// Which faces get another layer, indexed by Side.
using FaceChoice = std::array<bool, 6>;

/// All faces that absorb.
FaceChoice absorbing_faces(const Problem& problem);

struct Witness {
  Problem problem;
  /// The witness's own floor: largest reflection that the lattice predicts for its layers, over frequencies
  /// and over propagating, grazing and evanescent waves as far as they reach the clear volume
  /// (design_points.hpp) [dB], and the face where that is.
  double floor_db = 0.0;
  Side floor_side = Side::x_lo;
};

/// The problem with designed layers of twenty Moebius cells on the chosen faces. Mesh lines of the clear
/// volume, time step, sources and recordings stay as they are, bit for bit; shells keep the lines they have
/// and go on with their outermost cell. Throws ProblemError when a chosen face does not absorb.
Witness with_witness_shell(const Problem& problem, const FaceChoice& faces);

/// "moebius, 20 cells": what with_witness_shell puts in.
std::string witness_layer_text();

}  // namespace wanewall
