// The declarations as a reference page in Markdown.
#include <fmt/format.h>

#include <set>

#include "io/scene.hpp"
#include "io/scene/complaint.hpp"
#include "io/scene/declaration.hpp"

namespace wanewall {
namespace {

using scene::Block;
using scene::Form;
using scene::Key;

/// Text for a cell of a table: no bars, no line ends.
std::string cell(const std::string& text) {
  std::string safe;
  for (const char c : text) {
    if (c == '|') safe += '\\';
    safe += c == '\n' ? ' ' : c;
  }
  return safe;
}

std::string default_text(const Key& key) {
  if (key.required) return "required";
  if (!key.fallback.empty()) return "`" + key.fallback + "`";
  return key.derived.empty() ? "none" : key.derived;
}

/// What a key takes, short: blocks are named, units are left to the list of units.
std::string takes(const Form& form) {
  switch (form.kind) {
    case Form::Kind::quantity:
      return with_article(form.family) + range_text(form);
    case Form::Kind::list: {
      const std::string entry = takes(form.of[0]);
      if (form.of[0].kind == Form::Kind::block) return "list of: " + entry;
      if (form.least == form.most) return fmt::format("list of {}, each {}", form.least, entry);
      return fmt::format("list of {} to {}, each {}", form.least, form.most, entry);
    }
    case Form::Kind::block:
      return fmt::format("block, see *{}*", form.block->title);
    case Form::Kind::named:
      return "names of your choice, each " + takes(form.of[0]);
    case Form::Kind::word: {
      std::string words;
      for (const std::string& word : form.words) words += (words.empty() ? "`" : ", `") + word + "`";
      return words;
    }
    case Form::Kind::either:
      return takes(form.of[0]) + "; or " + takes(form.of[1]);
    default:
      return allowed_text(form);
  }
}

void collect(const Form& form, std::vector<const Block*>& blocks, std::set<const Block*>& seen);

void collect(const Block& block, std::vector<const Block*>& blocks, std::set<const Block*>& seen) {
  if (!seen.insert(&block).second) return;
  blocks.push_back(&block);
  for (const Key& key : block.keys) collect(key.form, blocks, seen);
}

void collect(const Form& form, std::vector<const Block*>& blocks, std::set<const Block*>& seen) {
  if (form.block != nullptr) collect(*form.block, blocks, seen);
  for (const Form& one : form.of) collect(one, blocks, seen);
}

std::string section(const Block& block) {
  std::string text = fmt::format("\n## {}\n\n{}\n", block.title, block.sentence);
  for (const auto& group : block.exactly_one_of)
    text += fmt::format("\nExactly one of: {}.\n", scene::joined(group));
  for (const auto& group : block.at_least_one_of)
    text += fmt::format("\nAt least one of: {}.\n", scene::joined(group));
  for (const auto& group : block.at_most_one_of)
    text += fmt::format("\nAt most one of: {}.\n", scene::joined(group));
  text += "\n| key | takes | default | |\n|---|---|---|---|\n";
  for (const Key& key : block.keys)
    text += fmt::format("| `{}` | {} | {} | {} |\n", key.name, cell(takes(key.form)), cell(default_text(key)),
                        cell(key.sentence));
  if (!block.later.empty()) {
    std::vector<std::string> names;
    for (const auto& later : block.later) names.push_back(later.name);
    text += fmt::format("\nFor a later version: {}.\n", scene::joined(names));
  }
  return text;
}

std::string units_section() {
  std::string text =
      "\n## Units\n\nEvery quantity is a number and a unit: `6 mm`, `0.4 GHz`, `-60 dB`. Upper and lower "
      "case differ. `µ` may "
      "stand for `u`.\n\n| quantity | units |\n|---|---|\n";
  for (const Family family : all_families())
    text += fmt::format("| {} | {} |\n", name_of(family), unit_list(family));
  return text;
}

}  // namespace

std::string scene_reference_markdown() {
  std::vector<const Block*> blocks;
  std::set<const Block*> seen;
  collect(scene::scene_block(), blocks, seen);
  std::string text =
      "# The scene file\n\nWritten by `wanewall check --reference` from the declarations that the reader "
      "uses. A scene is a "
      "YAML file; each key is listed once, under the block it stands in.\n";
  for (const Block* block : blocks) text += section(*block);
  return text + units_section();
}

}  // namespace wanewall
