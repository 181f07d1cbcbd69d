#include "io/scene.hpp"

#include <filesystem>
#include <stdexcept>

#include "io/errors.hpp"
#include "io/scene/checks.hpp"
#include "io/scene/conform.hpp"
#include "io/scene/cursor.hpp"
#include "io/scene/read.hpp"
#include "io/scene/source.hpp"
#include "io/text_file.hpp"

namespace wanewall {

Scene parse_scene(const std::string& text, const std::string& name, const std::string& folder) {
  const scene::NodePtr tree = scene::parse_source(text, name);
  scene::check_form(*tree, scene::scene_block(), name);
  Scene scene;
  scene.file = name;
  scene.text = text;
  scene::Reading reading{name, folder, {}, {}, {}};
  scene::Cursor root(reading, tree.get(), scene::scene_block(), "");
  scene::read_head(root, scene);
  scene::read_media(root, scene);
  scene::read_kinds(root, scene);
  // The layers are designed for what stands in the clear volume, so the lattice gets its shell last.
  const Vec3 cell_m = scene::read_clear_lattice(root, scene);
  scene::read_objects(root, scene);
  scene::read_illumination(root, reading, scene);
  scene::read_stop(root, scene);
  scene::read_layers(root, reading, scene);
  scene::add_shell(root, scene, cell_m);
  scene::read_record(root, scene);
  scene::check_scene(root, reading, scene);
  scene.used = std::move(reading.used);
  scene.warnings = std::move(reading.warnings);
  return scene;
}

Scene read_scene(const std::string& path) {
  const std::string text = read_text_file(path, "reading the scene", scene::largest_scene_bytes);
  const std::filesystem::path folder = std::filesystem::path(path).parent_path();
  return parse_scene(text, path, folder.empty() ? "." : folder.string());
}

}  // namespace wanewall
