#include "io/provenance.hpp"

#include <fmt/chrono.h>
#include <fmt/format.h>
#include <sys/utsname.h>
#include <unistd.h>

#include <chrono>
#include <fstream>
#include <thread>

namespace wanewall {
namespace {

// GCC names only its version in __VERSION__, Clang also itself.
std::string compiler_text() {
#if defined(__clang__)
  return __VERSION__;
#elif defined(__GNUC__)
  return "GCC " __VERSION__;
#else
  return "unknown";
#endif
}

std::string build_text() {
  std::string text = WANEWALL_BUILD_TYPE;
#if defined(WANEWALL_BUILT_NATIVE)
  text += ", tuned for the processor it was built on";
#endif
#if defined(WANEWALL_BUILT_WITH_SANITIZER)
  text += ", " WANEWALL_BUILT_WITH_SANITIZER " sanitizer";
#endif
  return text;
}

std::string processor_text() {
  std::ifstream info("/proc/cpuinfo");
  std::string name = "unknown";
  for (std::string line; std::getline(info, line);) {
    if (line.starts_with("model name")) {
      const auto colon = line.find(": ");
      if (colon != std::string::npos) name = line.substr(colon + 2);
      break;
    }
  }
  return fmt::format("{}, {} hardware threads", name, std::thread::hardware_concurrency());
}

std::string host_system_text() {
  utsname names{};
  if (uname(&names) != 0) return "unknown";
  return fmt::format("{} {} {}", names.sysname, names.release, names.machine);
}

}  // namespace

std::string utc_now() {
  const auto now = std::chrono::time_point_cast<std::chrono::seconds>(std::chrono::system_clock::now());
  return fmt::format("{:%Y-%m-%d %H:%M:%S} +0000", fmt::gmtime(now));
}

Provenance provenance_of_program() {
  Provenance p;
  p.program_version = WANEWALL_VERSION;
  p.build_type = build_text();
  p.compiler = compiler_text();
  p.processor = processor_text();
  p.host_system = host_system_text();
  return p;
}

double machine_memory_bytes() {
  const long pages = sysconf(_SC_PHYS_PAGES);
  const long page_bytes = sysconf(_SC_PAGE_SIZE);
  return pages > 0 && page_bytes > 0 ? static_cast<double>(pages) * static_cast<double>(page_bytes) : 0.0;
}

std::string version_text() {
  return fmt::format("wanewall {}\nbuild: {}\ncompiler: {}", WANEWALL_VERSION, build_text(), compiler_text());
}

}  // namespace wanewall
