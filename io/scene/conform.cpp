#include "io/scene/conform.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "io/scene/complaint.hpp"

namespace wanewall::scene {
namespace {

constexpr std::size_t enough_complaints = 100;  ///< after which the rest is not looked at

class Checker {
 public:
  explicit Checker(std::vector<Complaint>& complaints) : complaints_(complaints) {}

  void block(const Node& node, const Block& declared, const std::string& path) {
    for (const Entry& entry : node.entries) {
      if (complaints_.size() >= enough_complaints) return;
      const std::string inner = path.empty() ? shown(entry.key) : path + "." + shown(entry.key);
      if (const Key* key = declared.find(entry.key))
        form(*entry.value, key->form, inner);
      else
        unknown(entry, declared, inner);
    }
    for (const Key& key : declared.keys)
      if (key.required && node.find(key.name) == nullptr && !is_misspelt(node, declared, {key.name}))
        complain(node.place, fmt::format("{} is missing", path.empty() ? key.name : path + "." + key.name),
                 allowed_text(key.form), fmt::format("add `{}:`. {}", key.name, key.sentence));
    groups(node, declared, path);
  }

 private:
  void complain(Place place, std::string wrong, std::string allowed, std::string next) {
    if (complaints_.size() < enough_complaints)
      complaints_.push_back({place, std::move(wrong), std::move(allowed), std::move(next)});
  }

  void not_allowed(const Node& node, const std::string& path, std::string allowed, std::string next) {
    complain(node.place, fmt::format("{} = {} is not allowed", path, shown(node)), std::move(allowed),
             std::move(next));
  }

  /// Whether an unknown key is near to one of these: it has been complained of already.
  static bool is_misspelt(const Node& node, const Block& declared, const std::vector<std::string>& names) {
    return std::any_of(node.entries.begin(), node.entries.end(), [&](const Entry& entry) {
      if (declared.find(entry.key) != nullptr) return false;
      const std::string near = nearest(entry.key, declared.names());
      return std::find(names.begin(), names.end(), near) != names.end();
    });
  }

  void unknown(const Entry& entry, const Block& declared, const std::string& path) {
    for (const Later& later : declared.later)
      if (later.name == entry.key) {
        complain(entry.key_place, fmt::format("{} belongs to a later version", path),
                 joined(declared.names()), later.instead);
        return;
      }
    const std::string near = nearest(entry.key, declared.names());
    complain(entry.key_place, fmt::format("{} is not a known key", path), joined(declared.names()),
             near.empty() ? "see `wanewall check --reference` for what each key does"
                          : fmt::format("did you mean `{}`?", near));
  }

  void groups(const Node& node, const Block& declared, const std::string& path) {
    const auto given_of = [&](const std::vector<std::string>& group) {
      std::vector<const Entry*> given;
      for (const Entry& entry : node.entries)
        if (std::find(group.begin(), group.end(), entry.key) != group.end()) given.push_back(&entry);
      return given;
    };
    const std::string of_path = path.empty() ? "the scene" : path;
    const auto too_many = [&](const std::vector<const Entry*>& given, const std::vector<std::string>& group) {
      complain(given[1]->key_place,
               fmt::format("{} has both `{}` and `{}`", of_path, shown(given[0]->key), shown(given[1]->key)),
               "one of " + joined(group), "remove one of the two");
    };
    const auto none = [&](const std::vector<std::string>& group, std::string_view count) {
      if (is_misspelt(node, declared, group)) return;
      complain(node.place, fmt::format("{} has none of the keys that say what it is", of_path),
               fmt::format("{} of {}", count, joined(group)), "add one");
    };
    for (const auto& group : declared.exactly_one_of) {
      const auto given = given_of(group);
      if (given.size() > 1) too_many(given, group);
      if (given.empty()) none(group, "one");
    }
    for (const auto& group : declared.at_most_one_of) {
      const auto given = given_of(group);
      if (given.size() > 1) too_many(given, group);
    }
    for (const auto& group : declared.at_least_one_of)
      if (given_of(group).empty()) none(group, "at least one");
  }

  void form(const Node& node, const Form& declared, const std::string& path) {
    switch (declared.kind) {
      case Form::Kind::quantity:
      case Form::Kind::number:
      case Form::Kind::whole:
        return numeric(node, declared, path);
      case Form::Kind::word:
        return word(node, declared, path);
      case Form::Kind::text:
        if (node.kind != Node::Kind::scalar || node.text.size() > declared.most)
          not_allowed(node, path, allowed_text(declared), "shorten it or put it into quotes");
        return;
      case Form::Kind::name:
        if (node.kind != Node::Kind::scalar || !is_name(node.text))
          not_allowed(node, path, allowed_text(declared), "choose such a name");
        return;
      case Form::Kind::yes_no:
        if (node.kind != Node::Kind::scalar || (node.text != "true" && node.text != "false"))
          not_allowed(node, path, allowed_text(declared), "write true or false");
        return;
      case Form::Kind::list:
        return list(node, declared, path);
      case Form::Kind::block:
        if (node.kind != Node::Kind::map)
          not_allowed(node, path, allowed_text(declared),
                      "write `key: value` lines under it, or `{key: value, ...}`");
        else
          block(node, *declared.block, path);
        return;
      case Form::Kind::named:
        return named(node, declared, path);
      case Form::Kind::either:
        return either(node, declared, path);
    }
  }

  void numeric(const Node& node, const Form& declared, const std::string& path) {
    const std::string allowed = allowed_text(declared);
    if (node.kind != Node::Kind::scalar) {
      const bool nothing = node.kind == Node::Kind::nothing;
      return not_allowed(node, path, allowed,
                         nothing ? "write a value or remove the key" : "write a single value");
    }
    const ParsedQuantity parsed = declared.kind == Form::Kind::quantity
                                      ? parse_quantity(node.text, declared.family)
                                  : declared.kind == Form::Kind::number ? parse_number(node.text)
                                                                        : parse_whole(node.text);
    switch (parsed.fault) {
      case QuantityFault::none:
        if (!declared.range.contains(parsed.value))
          not_allowed(node, path, allowed, fmt::format("choose a value{}", range_text(declared)));
        return;
      case QuantityFault::no_unit: {
        return not_allowed(node, path, allowed,
                           fmt::format("write the unit behind the number, for example `{} {}`", shown(node),
                                       usual_unit(declared.family)));
      }
      case QuantityFault::wrong_unit:
        if (declared.kind == Form::Kind::quantity)
          return not_allowed(node, path, allowed,
                             fmt::format("`{}` is no unit of a {}; upper and lower case differ",
                                         shown(parsed.unit), name_of(declared.family)));
        return not_allowed(node, path, allowed, fmt::format("remove `{}`", shown(parsed.unit)));
      case QuantityFault::not_finite:
        return not_allowed(node, path, allowed, "write a finite number that double precision can hold");
      case QuantityFault::not_whole:
        return not_allowed(node, path, allowed, "write a whole number");
      case QuantityFault::empty:
      case QuantityFault::not_a_number:
        return not_allowed(node, path, allowed, "start with a number, with a point as the decimal sign");
    }
  }

  void word(const Node& node, const Form& declared, const std::string& path) {
    if (node.kind != Node::Kind::scalar)
      return not_allowed(node, path, allowed_text(declared), "write one word");
    if (std::find(declared.words.begin(), declared.words.end(), node.text) != declared.words.end()) return;
    for (const Later& later : declared.later)
      if (later.name == node.text)
        return complain(node.place, fmt::format("{} = {} belongs to a later version", path, later.name),
                        allowed_text(declared), later.instead);
    const std::string near = nearest(node.text, declared.words);
    not_allowed(node, path, allowed_text(declared),
                near.empty() ? "choose one of these" : fmt::format("did you mean `{}`?", near));
  }

  void list(const Node& node, const Form& declared, const std::string& path) {
    if (node.kind != Node::Kind::list)
      return not_allowed(node, path, allowed_text(declared),
                         "write a list: `[a, b, ...]` or lines that start with `- `");
    if (node.items.size() < declared.least || node.items.size() > declared.most)
      return complain(
          node.place,
          fmt::format("{} = {} is not allowed: it has {} entries", path, shown(node), node.items.size()),
          allowed_text(declared), "give as many as that");
    for (std::size_t i = 0; i < node.items.size(); ++i)
      form(*node.items[i], declared.of[0], fmt::format("{}[{}]", path, i));
  }

  void named(const Node& node, const Form& declared, const std::string& path) {
    if (node.kind != Node::Kind::map)
      return not_allowed(node, path, allowed_text(declared), "write `name: value` lines under it");
    for (const Entry& entry : node.entries) {
      const std::string inner = path + "." + shown(entry.key);
      if (!is_name(entry.key))
        complain(entry.key_place, fmt::format("the name {} is not allowed", inner),
                 "names of letters, digits, _ and -, at most 64 of them", "choose such a name");
      form(*entry.value, declared.of[0], inner);
    }
  }

  void either(const Node& node, const Form& declared, const std::string& path) {
    for (const Form& one : declared.of) {
      const Node::Kind kind = one.kind == Form::Kind::list ? Node::Kind::list
                              : one.kind == Form::Kind::block || one.kind == Form::Kind::named
                                  ? Node::Kind::map
                                  : Node::Kind::scalar;
      if (node.kind == kind) return form(node, one, path);
    }
    not_allowed(node, path, allowed_text(declared), "write one of these");
  }

  std::vector<Complaint>& complaints_;
};

}  // namespace

bool is_name(const std::string& text) {
  return !text.empty() && text.size() <= 64 && std::all_of(text.begin(), text.end(), [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-';
  });
}

void check_form(const Node& root, const Block& declared, const std::string& file) {
  std::vector<Complaint> complaints;
  if (root.kind != Node::Kind::map)
    reject(file, {root.place, fmt::format("the scene is {} instead of a block of keys", shown(root)),
                  joined(declared.names()), "write `key: value` lines"});
  Checker(complaints).block(root, declared, "");
  if (!complaints.empty()) reject(file, std::move(complaints));
}

}  // namespace wanewall::scene
