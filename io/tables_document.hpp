// The texts that `wanewall tables` makes of a record: one Markdown document for people, CSV tables for
// programs.
#pragma once

#include <string>
#include <vector>

#include "io/record.hpp"
#include "postproc/reflection_table.hpp"

namespace wanewall {

struct NamedText {
  std::string file_name;  ///< e.g. "reflection.csv"
  std::string text;
};

/// Frequencies at which the spectra of the points are given: those of the audit, or, without one, nine evenly
/// spaced over the record's band.
std::vector<double> point_frequencies_hz(const Record& record, const ReportChoice& choice);

/// `report` must come from the record's audit and the same choice.
std::string tables_markdown(const Record& record, const AuditReport& report, const ReportChoice& choice);

/// reflection.csv and power.csv when faces were audited, points.csv and point_spectra.csv when points were
/// recorded.
std::vector<NamedText> tables_csv(const Record& record, const AuditReport& report,
                                  const ReportChoice& choice);

}  // namespace wanewall
