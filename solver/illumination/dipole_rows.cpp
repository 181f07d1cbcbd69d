#include "solver/illumination/dipole_rows.hpp"

#include <cmath>

#include "geometry/constants.hpp"
#include "solver/interpolation.hpp"

namespace wanewall {

template <class Real>
DipoleRows<Real>::DipoleRows(const Problem& problem, const MediaRows<Real>& e_media,
                             const MediaRows<Real>& h_media)
    : dipoles_(problem.dipoles), dt_s_(problem.lattice.dt_s) {
  const Lattice& lattice = problem.lattice;
  for (std::size_t n = 0; n < dipoles_.size(); ++n) {
    const Dipole& dipole = dipoles_[n];
    for (Axis along : all_axes) {
      const double moment = dipole.moment[static_cast<std::size_t>(index_of(along))];
      if (moment == 0.0) continue;
      const Component c = dipole.is_magnetic ? magnetic(along) : electric(along);
      std::array<LinearPair, 3> pair;
      for (Axis a : all_axes)
        pair[static_cast<std::size_t>(index_of(a))] =
            linear_pair(lattice, c, a, dipole.position_m[static_cast<std::size_t>(index_of(a))]);
      for (int corner = 0; corner < 8; ++corner) {
        Index3 index{};
        double weight = 1.0, volume = 1.0;
        for (Axis a : all_axes) {
          const auto at = static_cast<std::size_t>(index_of(a));
          const bool upper = (corner >> at) & 1;
          index[at] = upper ? pair[at].upper : pair[at].lower;
          weight *= upper ? pair[at].upper_weight : 1.0 - pair[at].upper_weight;
          volume *= is_half(c, a) ? lattice.along(a).cell_m(index[at]) : lattice.along(a).dual_m(index[at]);
          // On a periodic axis the last node is the first one.
          if (lattice.periodic[at] && !is_half(c, a) && index[at] == lattice.cells(a)) index[at] = 0;
        }
        if (weight == 0.0) continue;
        const MediaRows<Real>& media = dipole.is_magnetic ? h_media : e_media;
        const double gain = media.row(index[0], index[1]).at(index_of(along), index[2]).gain;
        const double factor = -gain * weight * moment / volume * (dipole.is_magnetic ? 1.0 : eta0_ohm);
        rows_[{index[0], index[1]}].push_back({!dipole.is_magnetic, index_of(along), index[2], factor, n});
      }
    }
  }
}

template <class Real>
void DipoleRows<Real>::prepare(const StepBlock& block) {
  now_.clear();
  for (long step = block.first; step < block.end(); ++step)
    for (const Dipole& dipole : dipoles_)
      now_.push_back(
          value(dipole.pulse, dipole.is_magnetic ? time_of_e_s(step, dt_s_) : time_of_h_s(step - 1, dt_s_)));
}

template <class Real>
void DipoleRows<Real>::add(int i, int j, int slot, Real* const own[3], bool electric) const {
  const auto found = rows_.find({i, j});
  if (found == rows_.end()) return;
  const double* now = now_.data() + static_cast<std::size_t>(slot) * dipoles_.size();
  for (const Term& term : found->second) {
    if (term.electric == electric)
      own[term.component][term.k] += static_cast<Real>(term.factor * now[term.dipole]);
  }
}

template class DipoleRows<float>;
template class DipoleRows<double>;

}  // namespace wanewall
