#include "io/witness.hpp"

#include <fmt/format.h>

#include <filesystem>
#include <stdexcept>
#include <utility>

#include "postproc/witness_tables.hpp"

namespace wanewall {
namespace {

std::vector<std::string> parts_of(const std::string& text) {
  std::vector<std::string> parts{""};
  for (const char c : text) {
    if (c == ',')
      parts.emplace_back();
    else if (c != ' ')
      parts.back() += c;
  }
  return parts;
}

const Side* side_named(const std::string& name) {
  for (const Side& side : all_sides)
    if (name_of(side) == name) return &side;
  return nullptr;
}

std::string joined_faces(const FaceChoice& faces, const char* between) {
  std::string text;
  for (const Side side : all_sides)
    if (faces[static_cast<std::size_t>(index_of(side))])
      text += (text.empty() ? "" : between) + std::string(name_of(side));
  return text;
}

}  // namespace

bool names_faces(const std::string& text) {
  for (const std::string& part : parts_of(text))
    if (side_named(part) == nullptr) return false;
  return true;
}

FaceChoice witness_faces(const std::string& text, const Problem& problem) {
  const FaceChoice absorbing = absorbing_faces(problem);
  const std::string allowed = joined_faces(absorbing, ", ");
  if (allowed.empty())
    throw std::invalid_argument("no face of the scene absorbs, so there is nothing to witness");
  if (text.empty()) return absorbing;
  FaceChoice faces{};
  for (const std::string& part : parts_of(text)) {
    const Side* side = side_named(part);
    if (side == nullptr || !absorbing[static_cast<std::size_t>(index_of(*side))])
      throw std::invalid_argument(fmt::format("\"{}\" is {}\n  allowed: {}, joined by commas", part,
                                              side == nullptr ? "no face" : "a face that does not absorb",
                                              allowed));
    faces[static_cast<std::size_t>(index_of(*side))] = true;
  }
  return faces;
}

std::string face_list_text(const FaceChoice& faces) {
  return joined_faces(faces, ", ");
}

std::string witness_record_path(const std::string& record_path, const FaceChoice& faces,
                                const Problem& problem) {
  const std::filesystem::path path(record_path);
  std::string name = path.stem().string() + "_witness";
  if (faces != absorbing_faces(problem)) name += "_" + joined_faces(faces, "_");
  return (path.parent_path() / (name + path.extension().string())).string();
}

WitnessScene witness_scene(const Scene& scene, const FaceChoice& faces) {
  Witness witness = with_witness_shell(scene.problem, faces);
  WitnessScene result{scene, faces, witness.floor_db, witness.floor_side};
  result.scene.problem = std::move(witness.problem);
  if (!scene.title.empty()) result.scene.title = scene.title + " (witness)";
  result.scene.used.push_back({"witness.faces", face_list_text(faces), false});
  result.scene.used.push_back({"witness.layer", witness_layer_text(), false});
  return result;
}

std::string witness_text(const Scene& scene, const RunResult& run, const WitnessScene& witness,
                         const RunResult& witness_run, const std::vector<double>& frequencies_hz) {
  const Problem& problem = witness.scene.problem;
  std::string text = fmt::format(
      "## What the shell changed\n\n"
      "- The run against its witness, whose faces {} have layers of {}.\n"
      "- The witness's own floor: {:.1f} dB (face {}), the largest reflection of its layers that the lattice "
      "predicts, over\n"
      "  frequencies and over propagating, grazing and evanescent waves as far as they reach the clear "
      "volume. A smaller\n"
      "  change is printed as a bound.\n"
      "- Peak: largest |F| over time in the witness run; error bar: largest change of F over time. The other "
      "errors of a\n"
      "  run, of the mesh above all, are the same in both and not in it.\n",
      face_list_text(witness.faces), witness_layer_text(), witness.floor_db, name_of(witness.floor_side));
  if (problem.precision == Precision::single_precision)
    text += "- Single precision: the two runs also round differently, which shows near -100 dB and below.\n";
  const Comparison comparison =
      compare({problem.lattice, witness_run}, {scene.problem.lattice, run}, frequencies_hz);
  for (const std::string& note : comparison.notes) text += "- Note: " + note + "\n";
  text += "\n";
  if (!comparison.points.empty())
    text += to_markdown(witness_point_table(comparison, witness.floor_db)) + "\n";
  if (!comparison.faces.empty())
    text += "Fourier sums on the audit planes, over the clear cross-section:\n\n" +
            to_markdown(witness_face_table(comparison, witness.floor_db)) + "\n";
  if (comparison.points.empty() && comparison.faces.empty())
    text += "The scene records neither points nor audit planes, so there is nothing to compare.\n";
  return text;
}

}  // namespace wanewall
