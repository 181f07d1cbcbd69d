#include "io/scene/declaration.hpp"

#include <fmt/format.h>

#include <cmath>

#include "io/scene/complaint.hpp"

namespace wanewall::scene {

bool Range::contains(double value) const {
  return (lo_open ? value > lo : value >= lo) && (hi_open ? value < hi : value <= hi);
}

const Key* Block::find(std::string_view name) const {
  for (const Key& key : keys)
    if (key.name == name) return &key;
  return nullptr;
}

std::vector<std::string> Block::names() const {
  std::vector<std::string> list;
  for (const Key& key : keys) list.push_back(key.name);
  return list;
}

std::string range_text(const Form& form) {
  const auto shown_end = [&](double value) {
    return form.kind == Form::Kind::quantity ? format_quantity(value, form.family) : format_number(value, 12);
  };
  const Range& range = form.range;
  const bool has_lo = std::isfinite(range.lo), has_hi = std::isfinite(range.hi);
  if (has_lo && has_hi && !range.lo_open && !range.hi_open)
    return fmt::format(" from {} to {}", shown_end(range.lo), shown_end(range.hi));
  std::string text;
  if (has_lo) text += fmt::format(" {} {}", range.lo_open ? ">" : ">=", shown_end(range.lo));
  if (has_hi)
    text += fmt::format("{} {} {}", has_lo ? " and" : "", range.hi_open ? "<" : "<=", shown_end(range.hi));
  return text;
}

std::string allowed_text(const Form& form) {
  switch (form.kind) {
    case Form::Kind::quantity:
      return fmt::format("{}{} with its unit ({})", with_article(form.family), range_text(form),
                         unit_list(form.family));
    case Form::Kind::number:
      return fmt::format("a plain number{}", range_text(form));
    case Form::Kind::whole:
      return fmt::format("a whole number{}", range_text(form));
    case Form::Kind::word:
      return form.words.size() == 1 ? form.words[0] : "one of " + joined(form.words);
    case Form::Kind::text:
      return fmt::format("text of at most {} characters", form.most);
    case Form::Kind::name:
      return "a name of letters, digits, _ and -, at most 64 of them";
    case Form::Kind::yes_no:
      return "true or false";
    case Form::Kind::list: {
      const std::string entry = allowed_text(form.of[0]);
      if (form.least == form.most) return fmt::format("a list of {}, each {}", form.least, entry);
      if (form.of[0].kind == Form::Kind::block) return "a list of blocks, each " + entry;
      return fmt::format("a list of {} to {}, each {}", form.least, form.most, entry);
    }
    case Form::Kind::block:
      return fmt::format("{{{}}}", joined(form.block->names()));
    case Form::Kind::named:
      return fmt::format("{{name: ...}}, each {}", allowed_text(form.of[0]));
    case Form::Kind::either: {
      std::string text;
      for (const Form& one : form.of) text += (text.empty() ? "" : "; or ") + allowed_text(one);
      return text;
    }
  }
  return {};
}

}  // namespace wanewall::scene
