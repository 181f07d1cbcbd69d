// The declarations as a JSON Schema (draft 2020-12) for editors. Ranges of quantities cannot be said there
// and stand in the descriptions.
#include <fmt/format.h>

#include <cmath>
#include <set>

#include "io/scene.hpp"
#include "io/scene/declaration.hpp"

namespace wanewall {
namespace {

using scene::Block;
using scene::Form;
using scene::Key;

std::string quoted(std::string_view text) {
  std::string json = "\"";
  for (const char c : text) {
    if (c == '"' || c == '\\') json += '\\';
    json += c;
  }
  return json + "\"";
}

std::string listed(const std::vector<std::string>& words) {
  std::string json;
  for (const std::string& word : words) json += (json.empty() ? "" : ", ") + quoted(word);
  return "[" + json + "]";
}

/// A name for a block in "$defs": its title with everything but letters turned into _.
std::string definition_name(const Block& block) {
  std::string name;
  for (const char c : block.title) {
    const bool letter = (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
    if (letter)
      name += c;
    else if (!name.empty() && name.back() != '_')
      name += '_';
  }
  while (!name.empty() && name.back() == '_') name.pop_back();
  return name;
}

constexpr std::string_view name_pattern = "^[A-Za-z0-9_-]{1,64}$";

/// What parse_quantity accepts, as a regular expression.
std::string quantity_pattern(const Form& form) {
  std::string units;
  for (const Unit& unit : units_of(form.family)) {
    std::string name;
    for (const char c : unit.name)
      name += c == 'u' ? std::string("[u\u00b5\u03bc]") : c == ' ' ? " +" : std::string(1, c);
    units += (units.empty() ? "" : "|") + name;
  }
  return fmt::format(R"(^ *[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)? *({}) *$)", units);
}

std::string range_members(const Form& form) {
  std::string json;
  if (std::isfinite(form.range.lo))
    json += fmt::format(", \"{}\": {}", form.range.lo_open ? "exclusiveMinimum" : "minimum", form.range.lo);
  if (std::isfinite(form.range.hi))
    json += fmt::format(", \"{}\": {}", form.range.hi_open ? "exclusiveMaximum" : "maximum", form.range.hi);
  return json;
}

class SchemaWriter {
 public:
  std::string whole_schema() {
    const std::string root = block_members(scene::scene_block(), "  ");
    std::string definitions;
    while (!waiting_.empty()) {
      const Block* next = waiting_.back();
      waiting_.pop_back();
      definitions += fmt::format("{}    {}: {{\n{}\n    }}", definitions.empty() ? "" : ",\n",
                                 quoted(definition_name(*next)), block_members(*next, "      "));
    }
    return "{\n  \"$schema\": \"https://json-schema.org/draft/2020-12/schema\",\n  \"title\": \"Wanewall "
           "scene\",\n" +
           root + ",\n  \"$defs\": {\n" + definitions + "\n  }\n}\n";
  }

 private:
  /// Members of a form's schema, without braces.
  std::string form_members(const Form& form) {
    switch (form.kind) {
      case Form::Kind::quantity:
        return fmt::format("\"type\": \"string\", \"pattern\": {}", quoted(quantity_pattern(form)));
      case Form::Kind::number:
        return "\"type\": \"number\"" + range_members(form);
      case Form::Kind::whole:
        return "\"type\": \"integer\"" + range_members(form);
      case Form::Kind::word: {
        // Older YAML readers take the word off for false.
        std::string words = listed(form.words);
        if (form.words == std::vector<std::string>{"off"}) words = "[\"off\", false]";
        return "\"enum\": " + words;
      }
      case Form::Kind::text:
        return fmt::format("\"type\": [\"string\", \"number\", \"boolean\"], \"maxLength\": {}", form.most);
      case Form::Kind::name:
        return fmt::format("\"type\": \"string\", \"pattern\": {}", quoted(name_pattern));
      case Form::Kind::yes_no:
        return "\"type\": \"boolean\"";
      case Form::Kind::list:
        return fmt::format("\"type\": \"array\", \"minItems\": {}, \"maxItems\": {}, \"items\": {{{}}}",
                           form.least, form.most, form_members(form.of[0]));
      case Form::Kind::block:
        if (seen_.insert(form.block).second) waiting_.push_back(form.block);
        return fmt::format("\"$ref\": \"#/$defs/{}\"", definition_name(*form.block));
      case Form::Kind::named:
        return fmt::format(
            "\"type\": \"object\", \"propertyNames\": {{\"pattern\": {}}}, \"additionalProperties\": {{{}}}",
            quoted(name_pattern), form_members(form.of[0]));
      case Form::Kind::either: {
        std::string json;
        for (const Form& one : form.of)
          json += fmt::format("{}{{{}}}", json.empty() ? "" : ", ", form_members(one));
        return "\"anyOf\": [" + json + "]";
      }
    }
    return {};
  }

  static std::string description(const Key& key) {
    std::string text = key.sentence;
    if (key.form.kind == Form::Kind::quantity || key.form.kind == Form::Kind::list)
      text += " Allowed: " + allowed_text(key.form) + ".";
    if (!key.fallback.empty()) text += " Default: " + key.fallback + ".";
    if (!key.derived.empty()) text += " Default: " + key.derived + ".";
    return quoted(text);
  }

  static std::string default_member(const Key& key) {
    if (key.fallback.empty()) return {};
    switch (key.form.kind) {
      case Form::Kind::number:
      case Form::Kind::whole:
      case Form::Kind::yes_no:
        return ", \"default\": " + key.fallback;
      case Form::Kind::quantity:
      case Form::Kind::word:
      case Form::Kind::text:
      case Form::Kind::name:
        return ", \"default\": " + quoted(key.fallback);
      default:
        return {};
    }
  }

  static std::string required_each(const std::vector<std::string>& group) {
    std::string json;
    for (const std::string& name : group)
      json += fmt::format("{}{{\"required\": [{}]}}", json.empty() ? "" : ", ", quoted(name));
    return json;
  }

  static std::string group_members(const Block& block, const std::string& indent) {
    std::string json;
    const auto add = [&](const std::string& one) { json += (json.empty() ? "" : ", ") + one; };
    for (const auto& group : block.exactly_one_of) add("{\"oneOf\": [" + required_each(group) + "]}");
    for (const auto& group : block.at_least_one_of) add("{\"anyOf\": [" + required_each(group) + "]}");
    for (const auto& group : block.at_most_one_of)
      for (std::size_t i = 0; i < group.size(); ++i)
        for (std::size_t j = i + 1; j < group.size(); ++j)
          add("{\"not\": {\"required\": " + listed({group[i], group[j]}) + "}}");
    return json.empty() ? json : ",\n" + indent + "\"allOf\": [" + json + "]";
  }

  std::string block_members(const Block& block, const std::string& indent) {
    std::string properties;
    std::vector<std::string> required;
    for (const Key& key : block.keys) {
      properties +=
          fmt::format("{}{}  {}: {{{}, \"description\": {}{}}}", properties.empty() ? "" : ",\n", indent,
                      quoted(key.name), form_members(key.form), description(key), default_member(key));
      if (key.required) required.push_back(key.name);
    }
    std::string json =
        fmt::format("{0}\"description\": {1},\n{0}\"type\": \"object\",\n", indent, quoted(block.sentence));
    if (!required.empty()) json += fmt::format("{}\"required\": {},\n", indent, listed(required));
    json += fmt::format("{0}\"additionalProperties\": false,\n{0}\"properties\": {{\n{1}\n{0}}}", indent,
                        properties);
    return json + group_members(block, indent);
  }

  std::vector<const Block*> waiting_;
  std::set<const Block*> seen_;
};

}  // namespace

std::string scene_schema_json() {
  return SchemaWriter().whole_schema();
}

}  // namespace wanewall
