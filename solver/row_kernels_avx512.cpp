#define WANEWALL_VECTOR_BYTES 64
#define WANEWALL_VECTOR_NAMESPACE vector_avx512
#include "solver/row_kernels.inl"
#include "solver/table_kernels.inl"

namespace wanewall {

RowKernels<float> row_kernels_avx512_float() {
  return vector_avx512::make_kernels<float>("AVX-512");
}
RowKernels<double> row_kernels_avx512_double() {
  return vector_avx512::make_kernels<double>("AVX-512");
}

SampleTable sample_table_avx512() {
  return vector_avx512::sample_table;
}

AddIncident<float> add_incident_avx512_float() {
  return vector_avx512::add_incident<float>;
}
AddIncident<double> add_incident_avx512_double() {
  return vector_avx512::add_incident<double>;
}

AddSamples<float> add_samples_avx512_float() {
  return vector_avx512::add_samples<float>;
}
AddSamples<double> add_samples_avx512_double() {
  return vector_avx512::add_samples<double>;
}

}  // namespace wanewall
