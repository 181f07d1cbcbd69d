// A scene as read from its file: the problem to run and what the user asked for in their own words.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "solver/problem.hpp"
#include "solver/shell/design.hpp"
#include "solver/shell/surroundings.hpp"

namespace wanewall {

/// One value that a run really uses, in the scene's own notation.
struct UsedValue {
  std::string path;   ///< e.g. "mesh.cell", "shell.faces.z-.cells", "objects[1].layer.z"
  std::string value;  ///< with its unit, e.g. "10 mm"
  bool by_default = false;
};

/// How a face came to its table.
struct FaceDesign {
  enum class Origin { searched, polynomial, listed };
  Origin origin = Origin::searched;
  std::optional<double> goal_db;         ///< what the number of cells was chosen for
  std::optional<DesignInputs> inputs;    ///< of layers with a stretch
  std::optional<DesignFigures> figures;  ///< of the table on those inputs
};

struct Scene {
  std::string file;
  std::string text;
  std::string title;
  double band_lo_hz = 0.0;
  double band_hi_hz = 0.0;
  Problem problem;
  ShellSurroundings surroundings;
  DesignOverrides design_overrides;
  std::array<FaceDesign, 6> designs;  ///< of absorbing faces with a layer, indexed by Side
  std::vector<UsedValue> used;
  std::vector<std::string> warnings;
};

/// Reads and checks a scene file. Throws SceneError when the scene is wrong and FileError when the file (or a
/// CSV file it names, relative to the scene's folder) cannot be read.
Scene read_scene(const std::string& path);

/// The same for a text in memory; `name` stands for the file in messages, `folder` is where relative files
/// are.
Scene parse_scene(const std::string& text, const std::string& name, const std::string& folder);

/// JSON Schema of the scene language and its reference page in Markdown, from the declared keys.
std::string scene_schema_json();
std::string scene_reference_markdown();

}  // namespace wanewall
