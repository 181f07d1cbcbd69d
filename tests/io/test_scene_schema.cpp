// The JSON Schema and the reference page, both made from the declarations.
#include <sys/wait.h>
#include <unistd.h>
#include <yaml-cpp/yaml.h>

#include <catch2/catch.hpp>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <set>
#include <string>

#include "io/scene.hpp"
#include "io/scene/declaration.hpp"

using namespace wanewall;
using scene::Block;
using scene::Form;
using scene::Key;
namespace fs = std::filesystem;

namespace {

void collect(const Block& block, std::set<const Block*>& blocks);

void collect(const Form& form, std::set<const Block*>& blocks) {
  if (form.block != nullptr) collect(*form.block, blocks);
  for (const Form& one : form.of) collect(one, blocks);
}

void collect(const Block& block, std::set<const Block*>& blocks) {
  if (!blocks.insert(&block).second) return;
  for (const Key& key : block.keys) collect(key.form, blocks);
}

std::set<const Block*> all_blocks() {
  std::set<const Block*> blocks;
  collect(scene::scene_block(), blocks);
  return blocks;
}

}  // namespace

TEST_CASE("Every key has a sentence, and a default that its own form allows") {
  for (const Block* block : all_blocks()) {
    INFO(block->title);
    CHECK(block->sentence.ends_with("."));
    std::set<std::string> names;
    for (const Key& key : block->keys) {
      INFO(key.name);
      CHECK(names.insert(key.name).second);
      CHECK(key.sentence.ends_with("."));
      CHECK_FALSE(allowed_text(key.form).empty());
      if (key.fallback.empty()) continue;
      CHECK_FALSE(key.required);
      if (key.form.kind == Form::Kind::quantity) {
        const ParsedQuantity parsed = parse_quantity(key.fallback, key.form.family);
        CHECK(parsed.fault == QuantityFault::none);
        CHECK(key.form.range.contains(parsed.value));
      }
      if (key.form.kind == Form::Kind::number || key.form.kind == Form::Kind::whole) {
        const ParsedQuantity parsed = parse_number(key.fallback);
        CHECK(parsed.fault == QuantityFault::none);
        CHECK(key.form.range.contains(parsed.value));
      }
      if (key.form.kind == Form::Kind::word) {
        const auto& words = key.form.words;
        CHECK(std::find(words.begin(), words.end(), key.fallback) != words.end());
      }
    }
    for (const auto* groups : {&block->exactly_one_of, &block->at_most_one_of, &block->at_least_one_of})
      for (const auto& group : *groups)
        for (const std::string& name : group) {
          INFO("group member " << name);
          CHECK(block->find(name) != nullptr);
        }
  }
}

TEST_CASE("The schema is JSON and holds every block and every key with its sentence") {
  const YAML::Node schema = YAML::Load(scene_schema_json());  // JSON is YAML
  CHECK(schema["$schema"].as<std::string>() == "https://json-schema.org/draft/2020-12/schema");
  std::set<std::string> wanted, found;
  for (const Block* block : all_blocks())
    for (const Key& key : block->keys) wanted.insert(block->sentence + key.name + key.sentence);
  const auto look_at = [&](const YAML::Node& block) {
    CHECK_FALSE(block["additionalProperties"].as<bool>());
    for (const auto& property : block["properties"]) {
      const auto description = property.second["description"].as<std::string>();
      for (const std::string& one : wanted) {
        const std::string start = block["description"].as<std::string>() + property.first.as<std::string>();
        if (one.starts_with(start) && description.starts_with(one.substr(start.size()))) found.insert(one);
      }
    }
  };
  look_at(schema);
  for (const auto& definition : schema["$defs"]) look_at(definition.second);
  CHECK(schema["$defs"].size() + 1 == all_blocks().size());
  CHECK(found.size() == wanted.size());
}

TEST_CASE("The reference page tells every block, key, default and unit") {
  const std::string page = scene_reference_markdown();
  for (const Block* block : all_blocks()) {
    INFO(block->title);
    const std::size_t section = page.find("\n## " + block->title + "\n\n" + block->sentence + "\n");
    REQUIRE(section != std::string::npos);
    const std::string text = page.substr(section, page.find("\n## ", section + 4) - section);
    for (const Key& key : block->keys) {
      INFO(key.name);
      CHECK(text.find("| `" + key.name + "` | ") != std::string::npos);
      CHECK(text.find(key.sentence) != std::string::npos);
      if (!key.fallback.empty()) CHECK(text.find("`" + key.fallback + "`") != std::string::npos);
    }
  }
  for (const Family family : all_families())
    CHECK(page.find("| " + unit_list(family) + " |") != std::string::npos);
}

TEST_CASE("An independent validator agrees with the reader on good scenes and on faults of form") {
  const fs::path schema =
      fs::temp_directory_path() / ("wanewall_schema_" + std::to_string(getpid()) + ".json");
  std::ofstream(schema) << scene_schema_json();
  const std::string tests = std::string(WANEWALL_SOURCE_DIR) + "/tests/io/";
  const std::string command = "python3 '" + tests + "validate_scenes.py' '" + schema.string() + "' '" +
                              tests + "good_scenes' '" + tests + "bad_scenes' >&2";
  const int status = std::system(command.c_str());
  fs::remove(schema);
  REQUIRE(WIFEXITED(status));
  if (WEXITSTATUS(status) == 77 || WEXITSTATUS(status) == 127) {
    WARN("python3-jsonschema and python3-yaml are not installed: the schema was not held against them");
    return;
  }
  CHECK(WEXITSTATUS(status) == 0);
}
