// Sampled waveforms in CSV files.
#include <catch2/catch.hpp>

#include <filesystem>
#include <fstream>
#include <string>

#include <unistd.h>

#include "io/csv.hpp"
#include "io/errors.hpp"

using namespace wanewall;
namespace fs = std::filesystem;

namespace {

class CsvFile {
 public:
  explicit CsvFile(const std::string& text)
      : path_((fs::temp_directory_path() / ("wanewall_csv_" + std::to_string(getpid()) + ".csv")).string()) {
    std::ofstream(path_, std::ios::binary) << text;
  }
  ~CsvFile() { fs::remove(path_); }
  const std::string& path() const { return path_; }

 private:
  std::string path_;
};

std::string refusal_of(const std::string& text) {
  const CsvFile file(text);
  try {
    read_samples_csv(file.path());
  } catch (const SceneError& error) {
    const std::string what = error.what();
    CHECK(what.starts_with(file.path() + ":"));
    CHECK(what.find("\n  allowed: ") != std::string::npos);
    return what.substr(file.path().size());
  }
  return "";
}

}  // namespace

TEST_CASE("Two columns are read whatever separates them, with and without a header") {
  for (const std::string text : {"0,1\n1e-9,-2.5\n", "time_s,value\n0,1\n1e-9,-2.5\n",
                                 "time;value\r\n0;1\r\n1e-9;-2.5\r\n", "# a pulse\n\n 0 \t 1\n1e-9   -2.5",
                                 "\xef\xbb\xbf"
                                 "t,v\n0, 1\n1e-9, -2.5\n"}) {
    INFO(text);
    const CsvFile file(text);
    const Samples samples = read_samples_csv(file.path());
    CHECK(samples.time_s == std::vector<double>{0.0, 1e-9});
    CHECK(samples.value == std::vector<double>{1.0, -2.5});
  }
}

TEST_CASE("What is not a waveform is refused at its line") {
  CHECK(refusal_of("0,1\n1,2\n1,3\n").starts_with(":3:1: the time 1 is not later"));
  CHECK(refusal_of("0,1\n1,two\n").starts_with(":2:1: not two finite numbers"));
  CHECK(refusal_of("0,1\n1,nan\n").starts_with(":2:1: not two finite numbers"));
  CHECK(refusal_of("0,1\n1,2 V\n").starts_with(":2:1: 3 fields"));
  CHECK(refusal_of("t,v\nt,v\n0,1\n").starts_with(":2:1: not two finite numbers"));
  CHECK(refusal_of("0,1,2\n").starts_with(":1:1: 3 fields"));
  CHECK(refusal_of("0,1\n").find("fewer than two samples") != std::string::npos);
  CHECK(refusal_of("").find("fewer than two samples") != std::string::npos);
  std::string many;
  for (int n = 0; n <= 20000; ++n) many += std::to_string(n) + ",0\n";
  CHECK(refusal_of(many).starts_with(":20001:1: more than 20000 samples"));
  CHECK(refusal_of(std::string(5 << 20, '\n')).find("the file is too large") != std::string::npos);
}

TEST_CASE("A file that cannot be read is named with the reason") {
  CHECK_THROWS_AS(read_samples_csv("/no/such/folder/pulse.csv"), FileError);
  CHECK_THROWS_WITH(read_samples_csv("/no/such/folder/pulse.csv"),
                    Catch::Contains("/no/such/folder/pulse.csv: reading the pulse's samples: No such file"));
  CHECK_THROWS_AS(read_samples_csv(fs::temp_directory_path().string()), FileError);
}
