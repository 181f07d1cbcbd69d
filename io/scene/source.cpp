#include "io/scene/source.hpp"

#include <fmt/format.h>
#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/yaml.h>

#include <map>
#include <sstream>
#include <unordered_map>

#include "io/errors.hpp"
#include "io/scene/complaint.hpp"

namespace wanewall::scene {
namespace {

Place place_of(const YAML::Mark& mark) {
  return mark.is_null() ? Place{} : Place{mark.line + 1, mark.column + 1};
}

/// Bytes of the UTF-8 character at the start of a text; 0 when it is not one (overlong, surrogate, cut short,
/// ...).
std::size_t utf8_length(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned first = byte(0);
  if (first < 0x80) return 1;
  const std::size_t length = first >= 0xc2 && first < 0xe0   ? 2
                             : first >= 0xe0 && first < 0xf0 ? 3
                             : first >= 0xf0 && first < 0xf5 ? 4
                                                             : 0;
  if (length == 0 || length > text.size()) return 0;
  for (std::size_t i = 1; i < length; ++i)
    if ((byte(i) & 0xc0U) != 0x80U) return 0;
  const unsigned second = byte(1);
  if ((first == 0xe0 && second < 0xa0) || (first == 0xed && second > 0x9f) ||
      (first == 0xf0 && second < 0x90) || (first == 0xf4 && second > 0x8f))
    return 0;
  return length;
}

/// Checks what no YAML parser needs to see: size, encoding, control characters, tabs before the text of a
/// line.
void check_text(const std::string& text, const std::string& file) {
  if (text.size() > largest_scene_bytes)
    reject(file, {{},
                  fmt::format("the scene file has {} bytes", text.size()),
                  fmt::format("at most {} bytes", largest_scene_bytes),
                  "put long tables into CSV files"});
  Place place{1, 1};
  bool indenting = true;
  for (std::size_t i = 0; i < text.size();) {
    const std::string_view rest = std::string_view(text).substr(i);
    const std::size_t length = utf8_length(rest);
    const auto byte = static_cast<unsigned char>(text[i]);
    if (length == 0)
      reject(file, {place, fmt::format("byte 0x{:02x} is not UTF-8 text", byte), "UTF-8 text",
                    "save the file as UTF-8"});
    if ((byte < 0x20 && byte != '\n' && byte != '\r' && byte != '\t') || byte == 0x7f)
      reject(file, {place, fmt::format("control character 0x{:02x} in the text", byte),
                    "printable UTF-8 text", "remove the character"});
    if (byte == '\t' && indenting)
      reject(file, {place, "a tab in the indentation", "blanks", "replace tabs with blanks"});
    if (byte == '\n') {
      ++place.line;
      place.column = 1;
      indenting = true;
    } else {
      ++place.column;
      if (byte != ' ') indenting = false;
    }
    i += length;
  }
}

/// Builds the tree from the parser's events.
class TreeBuilder : public YAML::EventHandler {
 public:
  explicit TreeBuilder(const std::string& file) : file_(file) {}

  NodePtr root() const { return root_; }

  void OnDocumentStart(const YAML::Mark&) override {}
  void OnDocumentEnd() override {}

  void OnNull(const YAML::Mark& mark, YAML::anchor_t anchor) override {
    auto node = std::make_shared<Node>();
    node->place = place_of(mark);
    remember(anchor, node);
    add(node, 1, node->place);
  }

  void OnAlias(const YAML::Mark& mark, YAML::anchor_t anchor) override {
    if (++aliases_ > most_aliases)
      reject(file_, {place_of(mark), "too many aliases (*name)",
                     fmt::format("at most {} in a scene", most_aliases), "write the values out"});
    const auto found = anchors_.find(anchor);
    if (found == anchors_.end() || found->second.node->kind == Node::Kind::nothing)
      reject(file_, {place_of(mark), "an alias (*name) inside the value it stands for",
                     "aliases of values that are complete", "write the value out"});
    add(found->second.node, found->second.size, place_of(mark));
  }

  void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                const std::string& value) override {
    check_tag(mark, tag);
    auto node = std::make_shared<Node>();
    node->kind = Node::Kind::scalar;
    node->place = place_of(mark);
    node->text = value;
    remember(anchor, node);
    add(node, 1, node->place);
  }

  void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                       YAML::EmitterStyle::value) override {
    open(mark, tag, anchor, Node::Kind::list);
  }
  void OnSequenceEnd() override { close(); }
  void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor,
                  YAML::EmitterStyle::value) override {
    open(mark, tag, anchor, Node::Kind::map);
  }
  void OnMapEnd() override { close(); }

 private:
  struct Open {
    std::shared_ptr<Node> node;
    YAML::anchor_t anchor = 0;
    bool has_key = false;
    std::string key;
    Place key_place;
    std::unordered_map<std::string, Place> keys;  ///< of a map, so far
    std::size_t size = 1;                         ///< nodes, aliases counted in full
  };
  struct Anchored {
    NodePtr node;
    std::size_t size = 1;
  };

  void check_tag(const YAML::Mark& mark, const std::string& tag) const {
    if (tag.empty() || tag == "?" || tag == "!") return;
    reject(file_,
           {place_of(mark), fmt::format("the tag {}", shown(tag)), "values without tags", "remove the tag"});
  }

  void remember(YAML::anchor_t anchor, const NodePtr& node) {
    if (anchor != 0) anchors_[anchor] = {node, 1};
  }

  void open(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, Node::Kind kind) {
    check_tag(mark, tag);
    if (static_cast<int>(stack_.size()) >= deepest_nesting)
      reject(file_, {place_of(mark), "the scene is nested too deep",
                     fmt::format("at most {} levels of nesting", deepest_nesting), "check the brackets"});
    Open level;
    level.node = std::make_shared<Node>();
    level.node->kind = kind;
    level.node->place = place_of(mark);
    level.anchor = anchor;
    stack_.push_back(std::move(level));
  }

  void close() {
    Open level = std::move(stack_.back());
    stack_.pop_back();
    if (level.anchor != 0) anchors_[level.anchor] = {level.node, level.size};
    add(level.node, level.size, level.node->place);
  }

  /// Hands a complete node of `size` nodes, found at `place`, to the level it stands in.
  void add(const NodePtr& node, std::size_t size, Place place) {
    if (stack_.empty()) {
      root_ = node;
      return;
    }
    Open& level = stack_.back();
    if (level.size + size > most_nodes)
      reject(file_, {place, "the scene expands to too many values",
                     fmt::format("at most {} values, aliases counted in full", most_nodes),
                     "write fewer objects or use fewer aliases"});
    if (level.node->kind == Node::Kind::list) {
      level.node->items.push_back(node);
    } else if (!level.has_key) {
      if (node->kind != Node::Kind::scalar)
        reject(file_, {place, fmt::format("{} as a key", shown(*node)), "words as keys",
                       "check the colons and brackets of this line"});
      level.has_key = true;
      level.key = node->text;
      level.key_place = place;
      return;  // counted with its value
    } else {
      level.has_key = false;
      const auto [first, is_new] = level.keys.emplace(level.key, level.key_place);
      if (!is_new)
        reject(file_,
               {level.key_place, fmt::format("{} is given twice", shown(level.key)),
                fmt::format("each key once (first given at {}:{})", first->second.line, first->second.column),
                "remove one of the two"});
      level.node->entries.push_back({level.key, level.key_place, node});
    }
    level.size += size;
  }

  const std::string& file_;
  NodePtr root_;
  std::vector<Open> stack_;
  std::map<YAML::anchor_t, Anchored> anchors_;
  int aliases_ = 0;
};

void append_shown(const Node& node, std::string& text, std::size_t limit) {
  if (text.size() > limit) return;
  switch (node.kind) {
    case Node::Kind::nothing:
      text += "(nothing)";
      break;
    case Node::Kind::scalar:
      text += shown(node.text);
      break;
    case Node::Kind::list:
      text += '[';
      for (std::size_t i = 0; i < node.items.size() && text.size() <= limit; ++i) {
        if (i > 0) text += ", ";
        append_shown(*node.items[i], text, limit);
      }
      text += ']';
      break;
    case Node::Kind::map:
      text += '{';
      for (std::size_t i = 0; i < node.entries.size() && text.size() <= limit; ++i) {
        if (i > 0) text += ", ";
        text += shown(node.entries[i].key) + ": ";
        append_shown(*node.entries[i].value, text, limit);
      }
      text += '}';
      break;
  }
}

std::string shortened(const std::string& text, std::size_t limit) {
  if (text.size() <= limit) return text;
  std::size_t end = 0;  // at the start of a character
  while (end < limit) end += std::max<std::size_t>(1, utf8_length(std::string_view(text).substr(end)));
  return text.substr(0, end) + "...";
}

constexpr std::size_t shown_length = 60;

}  // namespace

const Entry* Node::find(std::string_view key) const {
  for (const Entry& entry : entries)
    if (entry.key == key) return &entry;
  return nullptr;
}

NodePtr parse_source(const std::string& text, const std::string& file) {
  check_text(text, file);
  std::istringstream stream(text);
  TreeBuilder builder(file);
  try {
    YAML::Parser parser(stream);
    parser.HandleNextDocument(builder);
    TreeBuilder second(file);
    if (builder.root() && parser.HandleNextDocument(second) && second.root())
      reject(file, {second.root()->place, "a second document (---)", "one scene per file",
                    "put the second scene into a file of its own"});
  } catch (const YAML::Exception& error) {
    reject(file, {place_of(error.mark), fmt::format("the text is not whole YAML: {}", shown(error.msg)),
                  "`key: value` lines, lists `[a, b]` and blocks `{key: value}`, all closed",
                  "check brackets, colons and indentation at and above this line"});
  }
  if (!builder.root())
    reject(file, {{1, 1},
                  "the scene is empty",
                  "a scene: band, clear_volume, mesh, stop, ...",
                  "start from a scene in the cases folder"});
  return builder.root();
}

std::string shown(const Node& node) {
  std::string text;
  append_shown(node, text, shown_length);
  return shortened(text, shown_length);
}

std::string written(const Node& node) {
  std::string text;
  append_shown(node, text, std::string::npos);
  return text;
}

std::string shown(std::string_view text) {
  std::string safe;
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t length = utf8_length(text.substr(i));
    const auto byte = static_cast<unsigned char>(text[i]);
    if (length == 0 || byte < 0x20 || byte == 0x7f)
      safe += '?';
    else
      safe += text.substr(i, length);
    i += std::max<std::size_t>(1, length);
  }
  return shortened(safe, 4 * shown_length);
}

}  // namespace wanewall::scene
