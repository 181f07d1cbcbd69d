#include "io/scene/cursor.hpp"

#include <fmt/format.h>

#include <stdexcept>

namespace wanewall::scene {
namespace {

double numeric(const Node& node, const Form& form) {
  const ParsedQuantity parsed = form.kind == Form::Kind::quantity ? parse_quantity(node.text, form.family)
                                : form.kind == Form::Kind::number ? parse_number(node.text)
                                                                  : parse_whole(node.text);
  if (!parsed) throw std::logic_error("a value was read before it was checked");
  return parsed.value;
}

const Form& alternative(const Form& form, Form::Kind kind) {
  if (form.kind == kind) return form;
  for (const Form& one : form.of)
    if (one.kind == kind) return one;
  throw std::logic_error("a key was read as what it is not declared to be");
}

Vec3 vec3_of(const Node& node, const Form& form) {
  Vec3 v{};
  for (std::size_t i = 0; i < 3; ++i) v[i] = numeric(*node.items[i], form.of[0]);
  return v;
}

}  // namespace

void Reading::use(std::string path, std::string value, bool by_default) {
  used.push_back({std::move(path), std::move(value), by_default});
}

void Reading::warn(Place place, const std::string& text) {
  warnings.push_back(place.line > 0 ? fmt::format("{}:{}:{}: {}", shown(file), place.line, place.column, text)
                                    : fmt::format("{}: {}", shown(file), text));
}

Cursor::Cursor(Reading& reading, const Node* node, const Block& block, std::string path, Place outer,
               bool is_default)
    : reading_(&reading),
      node_(node),
      block_(&block),
      path_(std::move(path)),
      outer_(outer),
      is_default_(is_default) {}

std::string Cursor::path(std::string_view key) const {
  return path_.empty() ? std::string(key) : path_ + "." + std::string(key);
}

std::string Cursor::given_path(std::string_view key) const {
  return !has_itself(key) && has(key) ? under_path_ + "." + std::string(key) : path(key);
}

const Key& Cursor::declared(std::string_view key) const {
  const Key* found = block_->find(key);
  if (found == nullptr) throw std::logic_error("undeclared key " + path(key));
  return *found;
}

const Node* Cursor::node_of(std::string_view key) const {
  declared(key);
  for (const Node* node : {node_, under_})
    if (node != nullptr)
      if (const Entry* entry = node->find(key)) return entry->value.get();
  return nullptr;
}

bool Cursor::has_itself(std::string_view key) const {
  declared(key);
  return node_ != nullptr && node_->find(key) != nullptr;
}

Place Cursor::place() const {
  return node_ != nullptr && !is_default_ ? node_->place : outer_;
}

Place Cursor::place(std::string_view key) const {
  const Node* node = node_of(key);
  return node != nullptr && !is_default_ ? node->place : place();
}

const Node& Cursor::used_node(std::string_view key) {
  const Node* node = node_of(key);
  if (node != nullptr) {
    reading_->use(path(key), written(*node), is_default_);
    return *node;
  }
  const Node& fallback = default_node(key);
  reading_->use(path(key), declared(key).fallback, true);
  return fallback;
}

const Node& Cursor::default_node(std::string_view key) const {
  const std::string& fallback = declared(key).fallback;
  if (fallback.empty()) throw std::logic_error("no value and no default for " + path(key));
  reading_->defaults.push_back(parse_source(fallback, "default of " + path(key)));
  return *reading_->defaults.back();
}

double Cursor::quantity(std::string_view key) {
  return numeric(used_node(key), alternative(declared(key).form, Form::Kind::quantity));
}
double Cursor::number(std::string_view key) {
  return numeric(used_node(key), declared(key).form);
}
long Cursor::whole(std::string_view key) {
  return static_cast<long>(numeric(used_node(key), alternative(declared(key).form, Form::Kind::whole)));
}
std::string Cursor::word(std::string_view key) {
  return used_node(key).text;
}
bool Cursor::yes(std::string_view key) {
  return used_node(key).text == "true";
}

std::vector<double> Cursor::quantities(std::string_view key) {
  const Form& form = alternative(declared(key).form, Form::Kind::list);
  std::vector<double> values;
  for (const NodePtr& item : used_node(key).items) values.push_back(numeric(*item, form.of[0]));
  return values;
}

Vec3 Cursor::vec3(std::string_view key) {
  return vec3_of(used_node(key), alternative(declared(key).form, Form::Kind::list));
}

std::array<double, 2> Cursor::pair(std::string_view key) {
  const std::vector<double> values = quantities(key);
  return {values[0], values[1]};
}

std::vector<std::string> Cursor::words(std::string_view key) {
  std::vector<std::string> list;
  for (const NodePtr& item : used_node(key).items) list.push_back(item->text);
  return list;
}

Cursor Cursor::block(std::string_view key) {
  const Block& inner = *alternative(declared(key).form, Form::Kind::block).block;
  const Node* node = node_of(key);
  if (node == nullptr && !declared(key).fallback.empty())
    return {*reading_, &default_node(key), inner, path(key), place(), true};
  return {*reading_, node, inner, path(key), place(), is_default_};
}

Cursor Cursor::block_under(std::string_view key, const Cursor& under) {
  const Block& inner = *alternative(declared(key).form, Form::Kind::block).block;
  Cursor block(*reading_, node_of(key), inner, path(key), place(), is_default_);
  block.under_ = under.node_;
  block.under_path_ = under.path_;
  return block;
}

std::vector<Cursor> Cursor::blocks(std::string_view key) {
  std::vector<Cursor> list;
  const Node* node = node_of(key);
  if (node == nullptr) return list;
  const Block& inner = *declared(key).form.of[0].block;
  for (std::size_t i = 0; i < node->items.size(); ++i)
    list.emplace_back(*reading_, node->items[i].get(), inner, fmt::format("{}[{}]", path(key), i));
  return list;
}

std::vector<std::pair<std::string, Cursor>> Cursor::named_blocks(std::string_view key) {
  std::vector<std::pair<std::string, Cursor>> list;
  const Node* node = node_of(key);
  if (node == nullptr) return list;
  const Block& inner = *declared(key).form.of[0].block;
  for (const Entry& entry : node->entries)
    list.emplace_back(entry.key, Cursor(*reading_, entry.value.get(), inner, path(key) + "." + entry.key));
  return list;
}

std::vector<Cursor::NamedPosition> Cursor::named_positions(std::string_view key) {
  std::vector<NamedPosition> list;
  const Node* node = node_of(key);
  if (node == nullptr) return list;
  const Form& form = declared(key).form.of[0];
  for (const Entry& entry : node->entries) {
    reading_->use(path(key) + "." + entry.key, written(*entry.value), false);
    list.push_back({entry.key, vec3_of(*entry.value, form), entry.value->place});
  }
  return list;
}

Node::Kind Cursor::kind(std::string_view key) const {
  if (const Node* node = node_of(key)) return node->kind;
  return declared(key).fallback.empty() ? Node::Kind::nothing : default_node(key).kind;
}

void Cursor::reject(std::string_view key, const std::string& allowed, const std::string& next) const {
  const Node* node = node_of(key);
  reject_text(
      key,
      fmt::format("{} = {} is not allowed", given_path(key), node != nullptr ? shown(*node) : "(nothing)"),
      allowed, next);
}

void Cursor::reject_text(std::string_view key, const std::string& wrong, const std::string& allowed,
                         const std::string& next) const {
  scene::reject(reading_->file, {place(key), wrong, allowed, next});
}

}  // namespace wanewall::scene
