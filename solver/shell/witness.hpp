// The same problem behind a much thicker shell: what differs between the two is what the shell did.
#pragma once

#include <array>
#include <string>
#include <vector>

#include "solver/problem.hpp"

namespace wanewall {

/// Which faces get another layer, indexed by Side.
using FaceChoice = std::array<bool, 6>;

/// All faces that absorb.
FaceChoice absorbing_faces(const Problem& problem);

/// The problem with layers of another kind and thickness on the chosen faces. Mesh lines of the clear volume,
/// time step, sources and recordings stay as they are, bit for bit; shells keep the lines they have and go on
/// with their outermost cell. Throws ProblemError when a chosen face does not absorb.
Problem with_witness_shell(const Problem& problem, const FaceChoice& faces);

/// "cfs_pml, 40 cells" for the layers that with_witness_shell puts in.
std::string witness_layer_text();

/// The largest reflection that the lattice predicts for the chosen faces of a problem: plane waves between 0
/// and 80 degrees, in every medium that touches the face, at the given frequencies.
struct PredictedFloor {
  double worst_db = 0.0;
  Side side = Side::x_lo;
  double frequency_hz = 0.0;
  double angle_rad = 0.0;
};
PredictedFloor predicted_floor(const Problem& problem, const FaceChoice& faces,
                               const std::vector<double>& frequencies_hz);

}  // namespace wanewall
