#define WANEWALL_VECTOR_BYTES 16
#define WANEWALL_VECTOR_NAMESPACE vector_base
#include "solver/row_kernels.inl"
#include "solver/table_kernels.inl"

namespace wanewall {

RowKernels<float> row_kernels_base_float() {
  return vector_base::make_kernels<float>("baseline");
}
RowKernels<double> row_kernels_base_double() {
  return vector_base::make_kernels<double>("baseline");
}

SampleTable sample_table_base() {
  return vector_base::sample_table;
}

AddIncident<float> add_incident_base_float() {
  return vector_base::add_incident<float>;
}
AddIncident<double> add_incident_base_double() {
  return vector_base::add_incident<double>;
}

AddSamples<float> add_samples_base_float() {
  return vector_base::add_samples<float>;
}
AddSamples<double> add_samples_base_double() {
  return vector_base::add_samples<double>;
}

}  // namespace wanewall
