#define WANEWALL_VECTOR_BYTES 32
#define WANEWALL_VECTOR_NAMESPACE vector_avx2
#include "solver/row_kernels.inl"
#include "solver/table_kernels.inl"

namespace wanewall {

RowKernels<float> row_kernels_avx2_float() {
  return vector_avx2::make_kernels<float>("AVX2");
}
RowKernels<double> row_kernels_avx2_double() {
  return vector_avx2::make_kernels<double>("AVX2");
}

SampleTable sample_table_avx2() {
  return vector_avx2::sample_table;
}

AddIncident<float> add_incident_avx2_float() {
  return vector_avx2::add_incident<float>;
}
AddIncident<double> add_incident_avx2_double() {
  return vector_avx2::add_incident<double>;
}

AddSamples<float> add_samples_avx2_float() {
  return vector_avx2::add_samples<float>;
}
AddSamples<double> add_samples_avx2_double() {
  return vector_avx2::add_samples<double>;
}

}  // namespace wanewall
