// Typed access to a checked scene by declared key. Every access notes the value used, given or by default.
#pragma once

#include <array>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "geometry/lattice.hpp"
#include "io/scene.hpp"
#include "io/scene/complaint.hpp"
#include "io/scene/declaration.hpp"
#include "io/scene/source.hpp"

namespace wanewall::scene {

/// What all readers share: the file's name and folder, and the values used so far.
struct Reading {
  std::string file, folder;
  std::vector<UsedValue> used;
  std::vector<std::string> warnings;
  std::vector<NodePtr> defaults;  ///< keeps parsed defaults alive

  void use(std::string path, std::string value, bool by_default);
  /// Adds "file:line:column: text" to the warnings.
  void warn(Place place, const std::string& text);
};

/// One block of the scene with its declaration. The block may be absent: then every key has its default.
/// `under` is a block that stands in for keys which the first does not give (every_face under a face).
class Cursor {
 public:
  Cursor(Reading& reading, const Node* node, const Block& block, std::string path, Place outer = {1, 1},
         bool is_default = false);

  const std::string& path() const { return path_; }
  std::string path(std::string_view key) const;
  /// Where the key really stands: in the block itself or in the one under it.
  std::string given_path(std::string_view key) const;
  bool is_given() const { return node_ != nullptr; }
  /// Given in the block itself or in the one under it.
  bool has(std::string_view key) const { return node_of(key) != nullptr; }
  bool has_itself(std::string_view key) const;
  /// Of the block, or of what it would stand in when it is absent.
  Place place() const;
  /// Of the value, or of the block when the key is absent.
  Place place(std::string_view key) const;

  double quantity(std::string_view key);
  double number(std::string_view key);
  long whole(std::string_view key);
  std::string word(std::string_view key);
  std::string text(std::string_view key) { return word(key); }
  bool yes(std::string_view key);
  std::vector<double> quantities(std::string_view key);
  Vec3 vec3(std::string_view key);
  std::array<double, 2> pair(std::string_view key);
  std::vector<std::string> words(std::string_view key);

  /// The block, or its default, or an absent block.
  Cursor block(std::string_view key);
  /// The same with another block under it.
  Cursor block_under(std::string_view key, const Cursor& under);
  std::vector<Cursor> blocks(std::string_view key);
  std::vector<std::pair<std::string, Cursor>> named_blocks(std::string_view key);
  struct NamedPosition {
    std::string name;
    Vec3 position_m;
    Place place;
  };
  std::vector<NamedPosition> named_positions(std::string_view key);
  /// Which form of an `either` is used: the node's kind, or that of the default.
  Node::Kind kind(std::string_view key) const;

  /// Notes a derived value under the key's path.
  void use(std::string_view key, const std::string& value) { reading_->use(path(key), value, true); }

  /// Throws SceneError "path = value is not allowed" at the key's value.
  [[noreturn]] void reject(std::string_view key, const std::string& allowed, const std::string& next) const;
  [[noreturn]] void reject_text(std::string_view key, const std::string& wrong, const std::string& allowed,
                                const std::string& next) const;

 private:
  const Key& declared(std::string_view key) const;
  const Node* node_of(std::string_view key) const;
  const Node& default_node(std::string_view key) const;
  /// The key's node or its parsed default; notes its use.
  const Node& used_node(std::string_view key);

  Reading* reading_;
  const Node* node_;
  const Block* block_;
  std::string path_;
  Place outer_;  ///< of the block that this one stands in
  const Node* under_ = nullptr;
  std::string under_path_;
  bool is_default_;
};

}  // namespace wanewall::scene
