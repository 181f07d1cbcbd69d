// A witness run: the scene again behind a much thicker shell, and what the two say about the first one's.
#pragma once

#include <string>
#include <vector>

#include "io/scene.hpp"
#include "solver/results.hpp"
#include "solver/shell/witness.hpp"

namespace wanewall {

/// The faces that a list such as "x-,z+" names; all that absorb for an empty text. Throws
/// std::invalid_argument with what is wrong and what is allowed.
FaceChoice witness_faces(const std::string& text, const Problem& problem);
/// Whether a text is such a list and not, say, the name of a file.
bool names_faces(const std::string& text);

/// "x-, z+"
std::string face_list_text(const FaceChoice& faces);

/// The name beside a record's: "night/drum.h5" -> "night/drum_witness.h5", with the faces' names behind it
/// when they are not all that absorb: "night/drum_witness_x-_z+.h5".
std::string witness_record_path(const std::string& record_path, const FaceChoice& faces,
                                const Problem& problem);

/// The scene with the layers of the chosen faces exchanged; its used values say so.
struct WitnessScene {
  Scene scene;
  FaceChoice faces{};
  double floor_db = 0.0;  ///< see Witness
  Side floor_side = Side::x_lo;
};
WitnessScene witness_scene(const Scene& scene, const FaceChoice& faces);

/// What the shell changed, as Markdown: tables with error bars, and the witness's own floor.
std::string witness_text(const Scene& scene, const RunResult& run, const WitnessScene& witness,
                         const RunResult& witness_run, const std::vector<double>& frequencies_hz);

}  // namespace wanewall
