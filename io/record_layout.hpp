// What is where in a record file: names, words and units. The layout, with every dataset carrying unitSI,
// unitDimension (powers of L, M, T, I, Theta, N, J) and a one-line description:
//
//   /                         openPMD 1.1.0 attributes, layoutVersion
//   /data/<step>/meshes/<name>_E/{x,y,z}   a snapshot's E, <name>_H its H; index order [z][y][x]
//   /snapshots/<name>_E/{x,y,z}/           step, time, and the component's own coordinates x, y, z [m]
//   /scene          text, used_path, used_value, used_by_default; attributes title, file, band_lo_hz,
//   band_hi_hz /mesh           x, y, z: all mesh lines [m]; attributes dt, shellCells, periodic, faceKinds,
//   sides, precision /shell/<face>/  what ended the lattice there: attributes kind, oneWayOrder; the layer's
//   tables, one entry per
//                   cell from the clear volume outwards: kappa, sigma, alpha of a moebius layer, each with _e
//                   and _h of the others
//   /run            attributes: how the run ended
//   /provenance     attributes: what made the record
//   /points/<name>/ time_E, time_H, Ex ... Hz; attributes name, position
//   /energy         step, time, energy
//   /shell_audit    frequency, incident_spectrum; attributes sampleEvery, incidentDirection,
//   incidentImpedance /shell_audit/faces/<face>/<component>_<index>   complex sums, index order
//   [frequency][first][second] over the
//                   stored indices of the two axes across the face's normal in the order x, y, z; each entry
//                   is a compound of double precision with the members "r" and "i" (single precision in
//                   layout 1)
//   /shell_audit/profiles/<face>/   of faces whose media depend on z: the update's media at all nodes and
//   half
//                   nodes of z
#pragma once

#include <array>
#include <cstdint>
#include <string>
#include <vector>

#include "geometry/lattice.hpp"
#include "io/hdf5.hpp"
#include "solver/results.hpp"

namespace wanewall::record_layout {

/// Raised when an older program could misread a newer record.
inline constexpr std::int64_t version = 2;
inline constexpr const char* program_mark = "Wanewall record";

/// Powers of length, mass, time, current, temperature, amount of substance, luminous intensity.
using Dimension = std::array<double, 7>;
inline constexpr Dimension dimensionless{};
inline constexpr Dimension length{1, 0, 0, 0, 0, 0, 0};
inline constexpr Dimension time{0, 0, 1, 0, 0, 0, 0};
inline constexpr Dimension frequency{0, 0, -1, 0, 0, 0, 0};
inline constexpr Dimension electric_field{1, 1, -3, -1, 0, 0, 0};
inline constexpr Dimension magnetic_field{-1, 0, 0, 1, 0, 0, 0};
inline constexpr Dimension electric_spectrum{1, 1, -2, -1, 0, 0, 0};
inline constexpr Dimension magnetic_spectrum{-1, 0, 1, 1, 0, 0, 0};
inline constexpr Dimension energy{2, 1, -2, 0, 0, 0, 0};
inline constexpr Dimension conductivity{-3, -1, 3, 2, 0, 0, 0};
inline constexpr Dimension magnetic_conductivity{1, 1, -3, -2, 0, 0, 0};
constexpr Dimension field_of(Component c) {
  return is_electric(c) ? electric_field : magnetic_field;
}
constexpr Dimension spectrum_of(Component c) {
  return is_electric(c) ? electric_spectrum : magnetic_spectrum;
}
constexpr const char* unit_of(Component c) {
  return is_electric(c) ? "V/m" : "A/m";
}

/// Marks a dataset of SI values with its unit and one line that says what it holds.
void describe(hdf5::Dataset& dataset, const Dimension& dimension, const std::string& description);

/// The tables of a face's layer and the lists of a profile, for writing and reading alike:
/// visit(name, dimension, description, values).
template <class AnyFace, class Visit>
void for_each_table(AnyFace& face, const Visit& visit) {
  if (face.kind == FaceKind::moebius) {
    visit("kappa", dimensionless, "kappa of each cell", face.moebius.kappa);
    visit("sigma", conductivity, "sigma of each cell [S/m]", face.moebius.sigma_s_per_m);
    visit("alpha", conductivity, "alpha of each cell [S/m]", face.moebius.alpha_s_per_m);
    return;
  }
  visit("sigma_e", conductivity, "sigma at the E nodes [S/m]", face.layer.sigma_e_s_per_m);
  visit("sigma_h", conductivity, "sigma at the half nodes [S/m]", face.layer.sigma_h_s_per_m);
  visit("kappa_e", dimensionless, "kappa at the E nodes", face.layer.kappa_e);
  visit("kappa_h", dimensionless, "kappa at the half nodes", face.layer.kappa_h);
  visit("alpha_e", conductivity, "alpha at the E nodes [S/m]", face.layer.alpha_e_s_per_m);
  visit("alpha_h", conductivity, "alpha at the half nodes [S/m]", face.layer.alpha_h_s_per_m);
}

template <class AnyProfile, class Visit>
void for_each_list(AnyProfile& profile, const Visit& visit) {
  visit("eps_r_node", dimensionless, "relative permittivity of Ex and Ey at the nodes of z",
        profile.permittivity_rel_node);
  visit("eps_r_half", dimensionless, "relative permittivity of Ez at the half nodes of z",
        profile.permittivity_rel_half);
  visit("sigma_node", conductivity, "conductivity for Ex and Ey [S/m]", profile.conductivity_s_per_m_node);
  visit("sigma_half", conductivity, "conductivity for Ez [S/m]", profile.conductivity_s_per_m_half);
  visit("mu_r_node", dimensionless, "relative permeability of Hz at the nodes of z",
        profile.permeability_rel_node);
  visit("mu_r_half", dimensionless, "relative permeability of Hx and Hy at the half nodes of z",
        profile.permeability_rel_half);
  visit("sigma_m_node", magnetic_conductivity, "magnetic conductivity for Hz [ohm/m]",
        profile.magnetic_conductivity_ohm_per_m_node);
  visit("sigma_m_half", magnetic_conductivity, "magnetic conductivity for Hx and Hy [ohm/m]",
        profile.magnetic_conductivity_ohm_per_m_half);
}

/// A user's name as the name of a group: every byte that is no letter, digit or underscore becomes an
/// underscore.
std::string sanitised(const std::string& name);
/// Throws FileError when two of the names become the same. `what` is "snapshots" or "points".
void refuse_collisions(const std::vector<std::string>& names, const std::string& what,
                       const std::string& path);

/// Name of the openPMD mesh record that holds a component of a snapshot, and of the component in it.
std::string mesh_record_of(const std::string& snapshot, Component c);
std::string member_of(Component c);
std::string iteration_of(long step);

/// The words of the file. They stay as they are even if the program's own wording changes. The readers throw
/// std::invalid_argument for any other word.
std::string word_of(FaceKind kind);
std::string word_of(StopReason reason);
std::string word_of(Precision precision);
FaceKind face_kind_of(const std::string& word);
StopReason stop_reason_of(const std::string& word);
Precision precision_of(const std::string& word);
Component component_of(const std::string& word);
Side side_of_word(const std::string& word);

}  // namespace wanewall::record_layout
