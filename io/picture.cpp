#include "io/picture.hpp"

#include <fmt/format.h>
#include <spawn.h>
#include <sys/wait.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <cmath>
#include <cstdio>
#include <cstring>
#include <memory>

#include "io/atomic_file.hpp"
#include "io/errors.hpp"

extern char** environ;

namespace wanewall {
namespace {

struct CloseFile {
  void operator()(std::FILE* file) const { std::fclose(file); }
};
using TemporaryFile = std::unique_ptr<std::FILE, CloseFile>;

TemporaryFile temporary_file(const std::string& path) {
  TemporaryFile file(std::tmpfile());
  if (!file)
    throw FileError(
        fmt::format("{}: no temporary file for the picture: {}\n  next: see whether TMPDIR is full", path,
                    std::strerror(errno)));
  return file;
}

std::string whole_text_of(std::FILE* file) {
  std::string text;
  std::rewind(file);
  std::array<char, 65536> part{};
  for (std::size_t n = 0; (n = std::fread(part.data(), 1, part.size(), file)) > 0;)
    text.append(part.data(), n);
  return text;
}

// gnuplot's single-quoted strings know one escape, the doubled quote.
std::string quoted(const std::string& text) {
  std::string result = "'";
  for (char c : text) {
    if (c == '\'') result += '\'';
    result += c == '\n' || c == '\r' ? ' ' : c;
  }
  return result + "'";
}

std::string range_text(const std::optional<std::pair<double, double>>& range) {
  return range ? fmt::format("[{:.9g}:{:.9g}]", range->first, range->second) : "[*:*]";
}

// Nothing is drawn through a value that is not there.
std::string number_text(double value) {
  return std::isfinite(value) ? fmt::format("{:.6g}", value) : "NaN";
}

constexpr std::array<const char*, 7> colours{"#0072B2", "#D55E00", "#009E73", "#CC79A7",
                                             "#E69F00", "#56B4E9", "#000000"};
constexpr std::array<const char*, 5> patterns{"1", "'-'", "'.'", "'_.'", "'_'"};

}  // namespace

std::string gnuplot_script(const LineChart& chart) {
  std::string script =
      "set terminal svg size 900,560 noenhanced background 'white' font 'sans-serif,15' linewidth 1.6\n"
      "set encoding utf8\n"
      "set datafile missing 'NaN'\n"
      "set grid linecolor '#cccccc' linewidth 0.5\n"
      "set key outside below maxcols 2 spacing 1.25\n";
  script += fmt::format("set title {}\nset xlabel {}\nset ylabel {}\n", quoted(chart.title),
                        quoted(chart.x_label), quoted(chart.y_label));
  script +=
      fmt::format("set xrange {}\nset yrange {}\n", range_text(chart.x_range), range_text(chart.y_range));
  std::string plot;
  for (std::size_t n = 0; n < chart.curves.size(); ++n) {
    const Curve& curve = chart.curves[n];
    script += fmt::format("$curve{} << end_of_curve\n", n);
    for (std::size_t i = 0; i < curve.x.size(); ++i)
      script += number_text(curve.x[i]) + " " + number_text(curve.y.at(i)) + "\n";
    script += "end_of_curve\n";
    plot += fmt::format("{}$curve{} using 1:2 with lines linecolor '{}' dashtype {} title {}",
                        n == 0 ? "plot " : ", ", n, colours[n % colours.size()],
                        patterns[n % patterns.size()], quoted(curve.label));
  }
  return script + plot + "\n";
}

void draw_svg(const LineChart& chart, const std::string& path) {
  const TemporaryFile script = temporary_file(path), svg = temporary_file(path),
                      faults = temporary_file(path);
  const std::string text = gnuplot_script(chart);
  const bool written =
      std::fwrite(text.data(), 1, text.size(), script.get()) == text.size() && std::fflush(script.get()) == 0;
  if (!written)
    throw FileError(fmt::format("{}: writing the picture's data: {}", path, std::strerror(errno)));
  std::rewind(script.get());

  posix_spawn_file_actions_t streams;
  posix_spawn_file_actions_init(&streams);
  posix_spawn_file_actions_adddup2(&streams, fileno(script.get()), 0);
  posix_spawn_file_actions_adddup2(&streams, fileno(svg.get()), 1);
  posix_spawn_file_actions_adddup2(&streams, fileno(faults.get()), 2);
  std::string name = "gnuplot";
  std::array<char*, 2> arguments{name.data(), nullptr};
  pid_t child = 0;
  const int error = posix_spawnp(&child, "gnuplot", &streams, nullptr, arguments.data(), environ);
  posix_spawn_file_actions_destroy(&streams);
  if (error == ENOENT)
    throw FileError(
        fmt::format("{}: pictures are drawn by the program gnuplot, which is not on the path\n"
                    "  next: sudo apt install gnuplot-nox, or leave the picture out",
                    path));
  if (error != 0) throw FileError(fmt::format("{}: starting gnuplot: {}", path, std::strerror(error)));
  int status = 0;
  while (waitpid(child, &status, 0) < 0 && errno == EINTR) {
  }
  const std::string drawn = whole_text_of(svg.get());
  if (!WIFEXITED(status) || WEXITSTATUS(status) != 0 || drawn.find("</svg>") == std::string::npos)
    throw FileError(
        fmt::format("{}: gnuplot could not draw the picture: {}", path, whole_text_of(faults.get())));
  write_atomically(path, drawn);
}

Curve thinned(const Curve& curve, std::size_t most_points) {
  const std::size_t n = curve.x.size();
  if (most_points == 0 || n <= most_points) return curve;
  Curve result{curve.label, {}, {}};
  for (std::size_t part = 0; part < most_points; ++part) {
    const std::size_t begin = n * part / most_points, end = n * (part + 1) / most_points;
    std::size_t best = begin;
    for (std::size_t i = begin; i < end; ++i)
      if (!(curve.y[i] <= curve.y[best])) best = i;
    result.x.push_back(curve.x[best]);
    result.y.push_back(curve.y[best]);
  }
  return result;
}

}  // namespace wanewall
