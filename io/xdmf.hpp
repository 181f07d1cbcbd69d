// An XDMF 3 sidecar: the light XML file with which general viewers open the snapshots of a record.
#pragma once

#include <string>
#include <vector>

#include "io/record.hpp"

namespace wanewall {

struct XdmfSeries {
  SnapshotList list;
  bool is_single = true;  ///< stored in single precision
};

/// The sidecar's text. Each component of each snapshot is a temporal collection of rectilinear grids on that
/// component's own points, since the components of a Yee lattice share none. It names the record by its file
/// name alone, so the two must lie in the same folder.
std::string xdmf_text(const std::string& record_path, const std::vector<XdmfSeries>& series);

}  // namespace wanewall
