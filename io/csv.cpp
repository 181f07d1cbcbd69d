#include "io/csv.hpp"

#include <fmt/format.h>

#include <array>
#include <string_view>

#include "io/errors.hpp"
#include "io/quantity.hpp"
#include "io/scene/complaint.hpp"
#include "io/text_file.hpp"

namespace wanewall {
namespace {

constexpr std::size_t largest_csv_bytes = 4 << 20;
constexpr std::size_t most_samples = 20'000;

using scene::reject;
using scene::shown;

bool separates(char c) {
  return c == ',' || c == ';' || c == ' ' || c == '\t';
}

/// The fields of a line, cut at commas, semicolons or blanks.
std::vector<std::string_view> fields_of(std::string_view line) {
  std::vector<std::string_view> fields;
  std::size_t begin = 0;
  while (begin < line.size()) {
    while (begin < line.size() && separates(line[begin])) ++begin;
    std::size_t end = begin;
    while (end < line.size() && !separates(line[end])) ++end;
    if (end > begin) fields.push_back(line.substr(begin, end - begin));
    begin = end;
  }
  return fields;
}

}  // namespace

Samples read_samples_csv(const std::string& path) {
  const std::string text = read_text_file(path, "reading the pulse's samples", largest_csv_bytes);
  if (text.size() > largest_csv_bytes)
    reject(path, {{},
                  "the file is too large",
                  fmt::format("at most {} bytes", largest_csv_bytes),
                  "thin the samples out"});
  Samples samples;
  const auto bad = [&](int line, const std::string& wrong, const std::string& next) {
    reject(path, {{line, 1}, wrong, "two numbers on each line: time in s (increasing) and value", next});
  };
  int number = 0;
  bool may_be_header = true;
  for (std::size_t begin = 0; begin < text.size();) {
    std::size_t end = text.find('\n', begin);
    if (end == std::string::npos) end = text.size();
    std::string_view line(text.data() + begin, end - begin);
    begin = end + 1;
    ++number;
    if (number == 1 && line.starts_with("\xef\xbb\xbf")) line.remove_prefix(3);
    if (line.ends_with('\r')) line.remove_suffix(1);
    const std::vector<std::string_view> fields = fields_of(line);
    if (fields.empty() || fields[0].front() == '#') continue;
    std::array<ParsedQuantity, 2> parsed;
    for (std::size_t i = 0; i < 2 && i < fields.size(); ++i) parsed[i] = parse_number(fields[i]);
    const bool is_header = may_be_header && parsed[0].fault == QuantityFault::not_a_number;
    may_be_header = false;
    if (is_header) continue;
    if (fields.size() != 2)
      bad(number, fmt::format("{} fields: {}", fields.size(), shown(line)), "give two columns");
    if (!parsed[0] || !parsed[1])
      bad(number, fmt::format("not two finite numbers: {}", shown(line)), "use a point as the decimal sign");
    if (!samples.time_s.empty() && parsed[0].value <= samples.time_s.back())
      bad(number, fmt::format("the time {} is not later than the one before it", shown(fields[0])),
          "sort the lines by time and remove repeated ones");
    if (samples.time_s.size() == most_samples)
      bad(number, fmt::format("more than {} samples", most_samples),
          "thin them out; straight lines join them");
    samples.time_s.push_back(parsed[0].value);
    samples.value.push_back(parsed[1].value);
  }
  if (samples.time_s.size() < 2) bad(number, "fewer than two samples", "give at least two");
  return samples;
}

}  // namespace wanewall
