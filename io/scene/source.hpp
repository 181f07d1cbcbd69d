// A scene's text as a tree of nodes that know their line and column, behind guards against hostile files.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

namespace wanewall::scene {

/// Line and column in the file, both from 1. Zero: not known.
struct Place {
  int line = 0;
  int column = 0;
};

struct Node;
using NodePtr = std::shared_ptr<const Node>;

struct Entry {
  std::string key;
  Place key_place;
  NodePtr value;
};

struct Node {
  enum class Kind { nothing, scalar, list, map };
  Kind kind = Kind::nothing;
  Place place;
  std::string text;            ///< of a scalar
  std::vector<NodePtr> items;  ///< of a list
  std::vector<Entry> entries;  ///< of a map, keys all different

  const Entry* find(std::string_view key) const;
};

/// Limits that no honest scene comes near.
inline constexpr std::size_t largest_scene_bytes = 1 << 20;
inline constexpr int deepest_nesting = 32;
inline constexpr int most_aliases = 100;
inline constexpr std::size_t most_nodes = 200'000;

/// Reads YAML text. `file` stands for the file in messages. Throws SceneError for text that is too large, not
/// UTF-8, indented with tabs, not YAML, nested too deep, or that repeats a key or expands too far through
/// aliases.
NodePtr parse_source(const std::string& text, const std::string& file);

/// A node in one line for a message, shortened: `-8`, `[1 m, 2 m]`, `{from: ...}`.
std::string shown(const Node& node);
/// The same in full.
std::string written(const Node& node);

/// Text made safe and short for a message: control characters and broken UTF-8 replaced.
std::string shown(std::string_view text);

}  // namespace wanewall::scene
