// The XDMF sidecar names what is in the record, with the right dimensions.
#include <hdf5.h>

#include <catch2/catch.hpp>
#include <fstream>
#include <iterator>
#include <regex>
#include <set>
#include <sstream>
#include <string>
#include <vector>

#include "io/errors.hpp"
#include "record_fixture.hpp"

using namespace wanewall;
using namespace wanewall::test;

namespace {

std::string text_of(const std::string& path) {
  std::ifstream in(path);
  return {std::istreambuf_iterator<char>(in), {}};
}

/// True when tags are nested properly; enough of XML for a file without sections and entities.
bool is_well_formed(const std::string& xml) {
  static const std::regex tag(
      R"re(<!--[\s\S]*?-->|<\?[^>]*\?>|<(/?)(\w+)((?:\s+\w+="[^"<]*")*)\s*(/?)>|<)re");
  std::vector<std::string> open;
  for (std::sregex_iterator it(xml.begin(), xml.end(), tag), end; it != end; ++it) {
    const std::smatch& match = *it;
    if (match.str() == "<") return false;
    if (!match[2].matched) continue;
    if (match[1] == "/") {
      if (open.empty() || open.back() != match[2]) return false;
      open.pop_back();
    } else if (match[4] != "/") {
      open.push_back(match[2]);
    }
  }
  return open.empty();
}

std::vector<hsize_t> numbers_in(const std::string& text) {
  std::istringstream in(text);
  return {std::istream_iterator<hsize_t>(in), {}};
}

}  // namespace

TEST_CASE("The sidecar is written on request only", "[record][xdmf]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5", false);
  CHECK_FALSE(std::filesystem::exists(folder / "run.h5.xdmf"));
  write_small_record(folder / "run.h5", true);
  CHECK(std::filesystem::exists(folder / "run.h5.xdmf"));
  CHECK(folder.n_files() == 2);
}

TEST_CASE("The sidecar names datasets of the record with their dimensions and precision", "[record][xdmf]") {
  const TemporaryFolder folder;
  const std::string path = folder / "run & co.h5";
  write_small_record(path, true);
  const std::string xml = text_of(path + ".xdmf");
  REQUIRE(is_well_formed(xml));
  CHECK(xml.find("Each component lies on its own points") != std::string::npos);

  static const std::regex item(
      R"re(<DataItem Dimensions="([0-9 ]+)" NumberType="Float" Precision="(\d)" Format="HDF">([^:]+):([^<]+)</DataItem>)re");
  const hid_t file = H5Fopen(path.c_str(), H5F_ACC_RDONLY, H5P_DEFAULT);
  REQUIRE(file >= 0);
  std::set<std::string> fields;
  int items = 0;
  for (std::sregex_iterator it(xml.begin(), xml.end(), item), end; it != end; ++it, ++items) {
    CHECK((*it)[3] == "run &amp; co.h5");
    const std::string name = (*it)[4];
    CAPTURE(name);
    const hid_t dataset = H5Dopen2(file, name.c_str(), H5P_DEFAULT);
    REQUIRE(dataset >= 0);
    const hid_t space = H5Dget_space(dataset), type = H5Dget_type(dataset);
    std::vector<hsize_t> extents(static_cast<std::size_t>(H5Sget_simple_extent_ndims(space)));
    H5Sget_simple_extent_dims(space, extents.data(), nullptr);
    CHECK(numbers_in((*it)[1]) == extents);
    CHECK(std::stoul((*it)[2]) == H5Tget_size(type));
    if (name.rfind("/data/", 0) == 0) fields.insert(name);
    H5Tclose(type);
    H5Sclose(space);
    H5Dclose(dataset);
  }
  H5Fclose(file);
  CHECK(items == 8 * 2 * 4);      // 8 components, 2 steps, 3 coordinates and 1 field
  CHECK(fields.size() == 8 * 2);  // each once

  // The coordinate lists come in the order x, y, z and belong to the component that they stand beside.
  static const std::regex grid(
      R"re(<Topology TopologyType="3DRectMesh" Dimensions="(\d+) (\d+) (\d+)"/>\s*<Geometry GeometryType="VXVYVZ">\s*<DataItem Dimensions="(\d+)"[^>]*>[^:]*:/snapshots/(\w+)/(\w)/x</DataItem>\s*<DataItem Dimensions="(\d+)"[^>]*>[^:]*:/snapshots/\w+/\w/y</DataItem>\s*<DataItem Dimensions="(\d+)"[^>]*>[^:]*:/snapshots/\w+/\w/z</DataItem>\s*</Geometry>\s*<Attribute[^>]*Center="Node">\s*<DataItem[^>]*>[^:]*:/data/\d+/meshes/(\w+)/(\w)</DataItem>)re");
  int grids = 0;
  for (std::sregex_iterator it(xml.begin(), xml.end(), grid), end; it != end; ++it, ++grids) {
    const std::smatch& match = *it;
    CHECK(match[1] == match[8]);
    CHECK(match[2] == match[7]);
    CHECK(match[3] == match[4]);
    CHECK(match[5] == match[9]);
    CHECK(match[6] == match[10]);
  }
  CHECK(grids == 8 * 2);
}

TEST_CASE("The sidecar's times are the components' own", "[record][xdmf]") {
  const TemporaryFolder folder;
  write_small_record(folder / "run.h5", true);
  const std::string xml = text_of(folder / "run.h5.xdmf");
  const double dt_s = small_lattice().dt_s;
  static const std::regex time(R"re(<Grid Name="(\w+)_(E|H)_\w_(\d+)"[^>]*>\s*<Time Value="([^"]+)"/>)re");
  int times = 0;
  for (std::sregex_iterator it(xml.begin(), xml.end(), time), end; it != end; ++it, ++times) {
    const long step = std::stol((*it)[3]);
    CHECK(std::stod((*it)[4]) == ((*it)[2] == "E" ? time_of_e_s(step, dt_s) : time_of_h_s(step, dt_s)));
  }
  CHECK(times == 16);
}
