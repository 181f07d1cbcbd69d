#include "io/xdmf.hpp"

#include <fmt/format.h>

#include <filesystem>

#include "io/record_layout.hpp"

namespace wanewall {
namespace {

namespace layout = record_layout;

std::string escaped(const std::string& text) {
  std::string result;
  for (const char c : text) {
    switch (c) {
      case '&':
        result += "&amp;";
        break;
      case '<':
        result += "&lt;";
        break;
      case '>':
        result += "&gt;";
        break;
      case '"':
        result += "&quot;";
        break;
      default:
        result += c;
    }
  }
  return result;
}

std::string data_item(const std::string& dimensions, int bytes, const std::string& file,
                      const std::string& dataset) {
  return fmt::format(
      "<DataItem Dimensions=\"{}\" NumberType=\"Float\" Precision=\"{}\" Format=\"HDF\">{}:{}</DataItem>",
      dimensions, bytes, escaped(file), dataset);
}

std::string series_text(const XdmfSeries& series, const std::string& file) {
  const SnapshotList& list = series.list;
  const std::string record = layout::mesh_record_of(list.name, list.component);
  const std::string member = layout::member_of(list.component);
  const std::string points = fmt::format("/snapshots/{}/{}", record, member);
  const std::string dimensions = fmt::format("{} {} {}", list.positions_m[2].size(),
                                             list.positions_m[1].size(), list.positions_m[0].size());
  std::string text = fmt::format(
      "  <Grid Name=\"{}_{}\" GridType=\"Collection\" CollectionType=\"Temporal\">\n", record, member);
  for (std::size_t n = 0; n < list.steps.size(); ++n) {
    text += fmt::format("   <Grid Name=\"{}_{}_{}\" GridType=\"Uniform\">\n", record, member, list.steps[n]);
    text += fmt::format("    <Time Value=\"{:.17g}\"/>\n", list.times_s[n]);
    text += fmt::format("    <Topology TopologyType=\"3DRectMesh\" Dimensions=\"{}\"/>\n", dimensions);
    text += "    <Geometry GeometryType=\"VXVYVZ\">\n";
    for (const Axis axis : all_axes)
      text += "     " +
              data_item(std::to_string(list.positions_m[static_cast<std::size_t>(index_of(axis))].size()), 8,
                        file, fmt::format("{}/{}", points, name_of(axis))) +
              "\n";
    text += "    </Geometry>\n";
    text += fmt::format("    <Attribute Name=\"{} [{}]\" AttributeType=\"Scalar\" Center=\"Node\">\n",
                        name_of(list.component), layout::unit_of(list.component));
    text += "     " +
            data_item(dimensions, series.is_single ? 4 : 8, file,
                      fmt::format("/data/{}/meshes/{}/{}", list.steps[n], record, member)) +
            "\n";
    text += "    </Attribute>\n   </Grid>\n";
  }
  return text + "  </Grid>\n";
}

}  // namespace

std::string xdmf_text(const std::string& record_path, const std::vector<XdmfSeries>& series) {
  const std::string file = std::filesystem::path(record_path).filename().string();
  std::string text =
      "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"
      "<!-- Each component lies on its own points of the Yee lattice (E on edges, H on faces and half a time "
      "step\n"
      "     later), so each has a grid and times of its own. Nothing has been averaged to common points. "
      "-->\n"
      "<Xdmf Version=\"3.0\">\n <Domain>\n";
  for (const XdmfSeries& one : series) text += series_text(one, file);
  return text + " </Domain>\n</Xdmf>\n";
}

}  // namespace wanewall
