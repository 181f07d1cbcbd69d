// Waveforms from CSV files.
#pragma once

#include <string>
#include <vector>

namespace wanewall {

struct Samples {
  std::vector<double> time_s;  ///< strictly increasing, at least two
  std::vector<double> value;
};

/// Two columns, time in s and value, separated by commas, semicolons, tabs or blanks; one header line, empty
/// lines and lines that start with # are allowed. Throws FileError when the file cannot be read, and
/// SceneError with its line when what it holds is not a waveform.
Samples read_samples_csv(const std::string& path);

}  // namespace wanewall
