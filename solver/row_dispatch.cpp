#include "solver/row_kernels.hpp"
#include "solver/table_kernels.hpp"

namespace wanewall {

RowKernels<float> row_kernels_base_float();
RowKernels<float> row_kernels_avx2_float();
RowKernels<float> row_kernels_avx512_float();
RowKernels<double> row_kernels_base_double();
RowKernels<double> row_kernels_avx2_double();
RowKernels<double> row_kernels_avx512_double();
AddIncident<float> add_incident_base_float();
AddIncident<double> add_incident_base_double();
AddIncident<float> add_incident_avx2_float();
AddIncident<double> add_incident_avx2_double();
AddIncident<float> add_incident_avx512_float();
AddIncident<double> add_incident_avx512_double();
AddSamples<float> add_samples_base_float();
AddSamples<double> add_samples_base_double();
AddSamples<float> add_samples_avx2_float();
AddSamples<double> add_samples_avx2_double();
AddSamples<float> add_samples_avx512_float();
AddSamples<double> add_samples_avx512_double();
SampleTable sample_table_base();
SampleTable sample_table_avx2();
SampleTable sample_table_avx512();

VectorCode best_vector_code() {
  if (__builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512vl") &&
      __builtin_cpu_supports("avx512dq") && __builtin_cpu_supports("avx512bw"))
    return VectorCode::avx512;
  return __builtin_cpu_supports("avx2") ? VectorCode::avx2 : VectorCode::baseline;
}

template <>
const RowKernels<float>& row_kernels(VectorCode code) {
  static const RowKernels<float> table[3]{row_kernels_base_float(), row_kernels_avx2_float(),
                                          row_kernels_avx512_float()};
  return table[static_cast<int>(code)];
}

template <>
const RowKernels<double>& row_kernels(VectorCode code) {
  static const RowKernels<double> table[3]{row_kernels_base_double(), row_kernels_avx2_double(),
                                           row_kernels_avx512_double()};
  return table[static_cast<int>(code)];
}

SampleTable sample_table(VectorCode code) {
  static const SampleTable table[3]{sample_table_base(), sample_table_avx2(), sample_table_avx512()};
  return table[static_cast<int>(code)];
}

template <>
AddIncident<float> add_incident(VectorCode code) {
  static const AddIncident<float> table[3]{add_incident_base_float(), add_incident_avx2_float(),
                                           add_incident_avx512_float()};
  return table[static_cast<int>(code)];
}

template <>
AddIncident<double> add_incident(VectorCode code) {
  static const AddIncident<double> table[3]{add_incident_base_double(), add_incident_avx2_double(),
                                            add_incident_avx512_double()};
  return table[static_cast<int>(code)];
}

template <>
AddSamples<float> add_samples(VectorCode code) {
  static const AddSamples<float> table[3]{add_samples_base_float(), add_samples_avx2_float(),
                                          add_samples_avx512_float()};
  return table[static_cast<int>(code)];
}

template <>
AddSamples<double> add_samples(VectorCode code) {
  static const AddSamples<double> table[3]{add_samples_base_double(), add_samples_avx2_double(),
                                           add_samples_avx512_double()};
  return table[static_cast<int>(code)];
}

}  // namespace wanewall
