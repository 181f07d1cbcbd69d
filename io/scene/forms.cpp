#include "io/scene/forms.hpp"

namespace wanewall::scene {

Form quantity(Family family, Range range) {
  Form form;
  form.kind = Form::Kind::quantity;
  form.family = family;
  form.range = range;
  return form;
}

Form above_zero(Family family) {
  return quantity(family, {0.0, no_end, true, false});
}

Form not_negative(Family family) {
  return quantity(family, {0.0, no_end, false, false});
}

Form number(Range range) {
  Form form;
  form.kind = Form::Kind::number;
  form.range = range;
  return form;
}

Form whole(double lo, double hi) {
  Form form;
  form.kind = Form::Kind::whole;
  form.range = {lo, hi, false, false};
  return form;
}

Form words(std::vector<std::string> list, std::vector<Later> later) {
  Form form;
  form.kind = Form::Kind::word;
  form.words = std::move(list);
  form.later = std::move(later);
  return form;
}

Form text() {
  Form form;
  form.kind = Form::Kind::text;
  form.most = 200;
  return form;
}

Form name() {
  Form form;
  form.kind = Form::Kind::name;
  return form;
}

Form yes_no() {
  Form form;
  form.kind = Form::Kind::yes_no;
  return form;
}

Form list_of(Form entry, std::size_t least, std::size_t most) {
  Form form;
  form.kind = Form::Kind::list;
  form.of = {std::move(entry)};
  form.least = least;
  form.most = most;
  return form;
}

Form block(const Block& of) {
  Form form;
  form.kind = Form::Kind::block;
  form.block = &of;
  return form;
}

Form named(Form entry) {
  Form form;
  form.kind = Form::Kind::named;
  form.of = {std::move(entry)};
  return form;
}

Form either(Form first, Form second) {
  Form form;
  form.kind = Form::Kind::either;
  form.of = {std::move(first), std::move(second)};
  return form;
}

Key required(std::string key_name, Form form, std::string sentence) {
  return {std::move(key_name), std::move(form), true, "", "", std::move(sentence)};
}

Key optional(std::string key_name, Form form, std::string sentence) {
  return {std::move(key_name), std::move(form), false, "", "", std::move(sentence)};
}

Key with_default(std::string key_name, Form form, std::string fallback, std::string sentence) {
  return {std::move(key_name), std::move(form), false, std::move(fallback), "", std::move(sentence)};
}

Key derived(std::string key_name, Form form, std::string rule, std::string sentence) {
  return {std::move(key_name), std::move(form), false, "", std::move(rule), std::move(sentence)};
}

Form position() {
  return list_of(quantity(Family::length), 3, 3);
}

Form length_range() {
  return list_of(quantity(Family::length), 2, 2);
}

Form fields() {
  return list_of(words({"E", "H", "Ex", "Ey", "Ez", "Hx", "Hy", "Hz"}), 1, 8);
}

Form face_names() {
  return list_of(words({"x-", "x+", "y-", "y+", "z-", "z+"}), 1, 6);
}

}  // namespace wanewall::scene
