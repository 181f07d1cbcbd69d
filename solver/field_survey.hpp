// What is asked of all fields at once, between steps.
#pragma once

#include <string>

#include "solver/fields.hpp"
#include "solver/media_rows.hpp"

namespace wanewall {

/// Energy in the clear volume [J], see EnergySeries.
template <class Real>
double clear_energy_j(const Lattice& lattice, const Fields<Real>& fields, const MediaRows<Real>& e_media,
                      const MediaRows<Real>& h_media, int threads);

/// First component and cell that is not finite, as text; empty when all are.
template <class Real>
std::string find_not_finite(const Fields<Real>& fields);

}  // namespace wanewall
