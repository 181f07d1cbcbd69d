// Full disks and damaged files: a FileError each time, and nothing half-written under the final name.
#include <hdf5.h>
#include <sys/resource.h>

#include <algorithm>
#include <catch2/catch.hpp>
#include <cerrno>
#include <csignal>
#include <cstdint>
#include <cstring>
#include <fstream>
#include <iterator>
#include <random>
#include <string>

#include "io/atomic_file.hpp"
#include "io/errors.hpp"
#include "io/hdf5_disk.hpp"
#include "io/record.hpp"
#include "record_fixture.hpp"

// HDF5 1.10 loses some memory of its own when it refuses a damaged file.
extern "C" const char* __lsan_default_suppressions();
extern "C" const char* __lsan_default_suppressions() {
  return "leak:libhdf5";
}

using namespace wanewall;
using namespace wanewall::test;

namespace {

/// Stands for a disk that is full after so many bytes of a file: writes past them fail with EFBIG.
class FileSizeLimit {
 public:
  explicit FileSizeLimit(rlim_t bytes) : old_action_(std::signal(SIGXFSZ, SIG_IGN)) {
    ::getrlimit(RLIMIT_FSIZE, &old_limit_);
    const rlimit limit{bytes, old_limit_.rlim_max};
    ::setrlimit(RLIMIT_FSIZE, &limit);
  }
  ~FileSizeLimit() {
    ::setrlimit(RLIMIT_FSIZE, &old_limit_);
    std::signal(SIGXFSZ, old_action_);
  }
  FileSizeLimit(const FileSizeLimit&) = delete;
  FileSizeLimit& operator=(const FileSizeLimit&) = delete;

 private:
  void (*old_action_)(int);
  rlimit old_limit_{};
};

std::string bytes_of(const std::string& path) {
  std::ifstream in(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

void write_bytes(const std::string& path, const std::string& bytes) {
  std::ofstream(path, std::ios::binary | std::ios::trunc) << bytes;
}

template <class T>
void append(std::string& all, const std::vector<T>& values) {
  all.append(reinterpret_cast<const char*>(values.data()), values.size() * sizeof(T));
}

/// All that a record holds, one after the other; empty when it was refused.
std::string contents_of(const std::string& path) {
  try {
    const Record record(path);
    std::string all =
        record.title + record.scene_text + record.provenance.processor + record.result.vector_code;
    for (const UsedValue& used : record.used) all += used.path + used.value;
    for (const Axis axis : all_axes) append(all, record.lattice.along(axis).all_m());
    append(all, std::vector<double>{record.band_lo_hz, record.band_hi_hz, record.lattice.dt_s});
    append(all, record.result.energy.joule);
    for (const PointSeries& point : record.result.points) {
      all += point.name;
      for (const std::vector<double>& values : point.values) append(all, values);
    }
    for (const AuditFace& face : record.result.audit.faces)
      for (const AuditPlane& plane : face.planes) append(all, plane.sums);
    for (const SnapshotList& list : record.snapshots)
      for (std::size_t which = 0; which < list.steps.size(); ++which)
        std::visit([&](const auto& values) { append(all, values); }, record.load(list, which).values);
    return all;
  } catch (const FileError& e) {
    INFO(e.what());
    CHECK(std::string(e.what()).rfind(path, 0) == 0);
    return "";
  }
}

bool is_refused(const std::string& path) {
  return contents_of(path).empty();
}

}  // namespace

TEST_CASE("A full disk is a FileError and leaves nothing", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const std::uintmax_t whole = std::filesystem::file_size(path);
  std::filesystem::remove(path);
  const auto tenths = GENERATE(range(0, 10));
  const auto limit = static_cast<rlim_t>(whole * static_cast<std::uintmax_t>(tenths) / 10 + 10);
  CAPTURE(whole, limit);
  {
    const FileSizeLimit full_disk(limit);
    CHECK_THROWS_WITH(write_small_record(path), Catch::StartsWith(path + ": cannot write: File too large"));
  }
  CHECK(folder.n_files() == 0);
  write_small_record(path);  // the library still works
  CHECK_FALSE(is_refused(path));
}

TEST_CASE("A full disk is noticed while the run goes on", "[record][faults]") {
  const TemporaryFolder folder;
  const FileSizeLimit full_disk(200'000);
  RecordWriter writer(folder / "run.h5", small_scene());
  std::array<std::vector<double>, 3> points_m;
  for (auto& points : points_m)
    for (int i = 0; i < 50; ++i) points.push_back(0.001 * i);
  Snapshot noise = counted_snapshot("cut", 0, Component::ex, points_m, 1e-12);
  std::mt19937_64 random(1);
  for (double& value : std::get<std::vector<double>>(noise.values)) value = static_cast<double>(random());
  CHECK_THROWS_AS(writer.take(noise), FileError);
}

TEST_CASE("What a full disk refuses stays readable until the file is given up", "[record][faults]") {
  const TemporaryFolder folder;
  const AtomicFile file(folder / "run.h5");
  hdf5::Disk disk(file.descriptor());
  const FileSizeLimit full_disk(10'000);
  std::vector<unsigned char> wanted(30'000);
  for (std::size_t n = 0; n < wanted.size(); ++n) wanted[n] = static_cast<unsigned char>(n % 251);
  for (std::size_t at = 0; at < wanted.size(); at += 1500) disk.write(at, wanted.data() + at, 1500);
  CHECK(disk.failure() == EFBIG);
  disk.write(5000, wanted.data(), 700);  // over what the disk had taken
  std::copy_n(wanted.begin(), 700, wanted.begin() + 5000);
  std::vector<unsigned char> found(wanted.size());
  for (std::size_t at = 0; at < found.size(); at += 1000) CHECK(disk.read(at, found.data() + at, 1000));
  CHECK(found == wanted);
}

TEST_CASE("A record that cannot be created is a FileError", "[record][faults]") {
  const TemporaryFolder folder;
  const Scene scene = small_scene();
  CHECK_THROWS_WITH(RecordWriter(folder / "missing/run.h5", scene),
                    Catch::Contains("No such file or directory"));
  std::filesystem::create_directory(folder / "taken");
  CHECK_THROWS_WITH(RecordWriter(folder / "taken", scene), Catch::Contains("it is a folder"));
  CHECK_THROWS_WITH(RecordWriter("/dev/null", scene), Catch::Contains("it is not a regular file"));
}

TEST_CASE("A text file appears whole or not at all", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "table.csv";
  write_atomically(path, "first\n");
  {
    const FileSizeLimit full_disk(100);
    CHECK_THROWS_AS(write_atomically(path, std::string(1000, 'x')), FileError);
  }
  CHECK(bytes_of(path) == "first\n");
  write_atomically(path, "second\n");
  CHECK(bytes_of(path) == "second\n");
  CHECK(folder.n_files() == 1);
}

TEST_CASE("What is no record is refused", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  CHECK_THROWS_WITH(Record(path), Catch::Contains("No such file or directory"));
  CHECK_THROWS_WITH(Record(folder / ""), Catch::Contains("it is not a regular file"));
  CHECK_THROWS_AS(Record(path + "/" + path), FileError);
  write_bytes(path, "");
  CHECK_THROWS_AS(Record(path), FileError);
  write_bytes(path, "title: a scene, no record\n");
  CHECK_THROWS_AS(Record(path), FileError);
  H5Fclose(H5Fcreate(path.c_str(), H5F_ACC_TRUNC, H5P_DEFAULT, H5P_DEFAULT));
  CHECK_THROWS_WITH(Record(path), Catch::Contains("is not a record"));
}

TEST_CASE("A record of a newer layout is refused with what to do", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const hid_t file = H5Fopen(path.c_str(), H5F_ACC_RDWR, H5P_DEFAULT);
  const hid_t attribute = H5Aopen(file, "layoutVersion", H5P_DEFAULT);
  const long long version = 99;
  H5Awrite(attribute, H5T_NATIVE_LLONG, &version);
  H5Aclose(attribute);
  H5Fclose(file);
  CHECK_THROWS_WITH(Record(path), Catch::Contains("layout 99") && Catch::Contains("use a newer program"));
}

TEST_CASE("A truncated record is refused wherever it ends", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const std::string whole = bytes_of(path);
  for (std::size_t part = 0; part < 50; ++part) {
    write_bytes(path, whole.substr(0, whole.size() * part / 50));
    CAPTURE(part);
    CHECK(is_refused(path));
  }
}

TEST_CASE("A flipped bit is noticed or does not matter", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const std::string whole = bytes_of(path);
  const std::string wanted = contents_of(path);
  std::mt19937 random(20);
  int noticed = 0;
  constexpr int trials = 400;
  for (int trial = 0; trial < trials; ++trial) {
    std::string damaged = whole;
    const std::size_t at = random() % damaged.size();
    damaged[at] = static_cast<char>(damaged[at] ^ (1 << (random() % 8)));
    write_bytes(path, damaged);
    CAPTURE(trial, at);
    const std::string found = contents_of(path);
    if (found.empty())
      ++noticed;
    else
      CHECK(found == wanted);
  }
  CHECK(noticed > trials / 2);
}

TEST_CASE("A flipped bit is noticed in values that cannot be made smaller", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  std::array<std::vector<double>, 3> points_m;
  for (auto& points : points_m)
    for (int i = 0; i < 20; ++i) points.push_back(0.001 * i);
  Snapshot noise = counted_snapshot("cut", 0, Component::ex, points_m, 1e-12);
  std::mt19937_64 random(3);
  for (double& value : std::get<std::vector<double>>(noise.values)) {
    const std::uint64_t bits = random() & 0xbfefffffffffffffU;  // any finite number
    std::memcpy(&value, &bits, sizeof value);
  }
  {
    RecordWriter writer(path, small_scene());
    writer.take(noise);
    writer.finish(small_result(), small_provenance(), false);
  }
  const std::string whole = bytes_of(path), wanted = contents_of(path);
  CHECK(whole.size() > 20 * 20 * 20 * sizeof(double) * 9 / 10);
  for (int trial = 0; trial < 50; ++trial) {
    std::string damaged = whole;
    const std::size_t at = random() % damaged.size();
    damaged[at] = static_cast<char>(damaged[at] ^ (1 << (random() % 8)));
    write_bytes(path, damaged);
    const std::string found = contents_of(path);
    CAPTURE(trial, at);
    CHECK((found.empty() || found == wanted));
  }
}

TEST_CASE("An overwritten stretch of a record is noticed or does not matter", "[record][faults]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run.h5";
  write_small_record(path);
  const std::string whole = bytes_of(path);
  const std::string wanted = contents_of(path);
  std::mt19937 random(21);
  for (int trial = 0; trial < 100; ++trial) {
    std::string damaged = whole;
    const std::size_t at = random() % damaged.size();
    const std::size_t end = std::min(damaged.size(), at + 1 + random() % 2000);
    for (std::size_t n = at; n < end; ++n) damaged[n] = static_cast<char>(random());
    write_bytes(path, damaged);
    const std::string found = contents_of(path);
    CHECK((found.empty() || found == wanted));
  }
}
