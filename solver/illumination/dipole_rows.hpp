// Point dipoles as currents on the edges (or faces) around them, shared out linearly so that the sum and the
// centre of the current are those asked for.
//   E:  eps dE/dt = curl H - J,   J = I l / (edge length x dual area)      at (n + 1/2) dt
//   H:  mu dH/dt = -curl E - K,   K l / (dual length x face area)          at n dt
#pragma once

#include <map>
#include <utility>
#include <vector>

#include "solver/media_rows.hpp"
#include "solver/problem.hpp"
#include "solver/recorders/recorder.hpp"

namespace wanewall {

template <class Real>
class DipoleRows {
 public:
  DipoleRows(const Problem& problem, const MediaRows<Real>& e_media, const MediaRows<Real>& h_media);

  bool empty() const { return rows_.empty(); }
  bool touches(int i, int j) const { return rows_.count({i, j}) > 0; }
  /// Evaluates the waveforms of a block of steps: each brings E to `step` and H to step + 1/2. One thread.
  void prepare(const StepBlock& block);
  void add_e(int i, int j, int slot, Real* const own[3]) const { add(i, j, slot, own, true); }
  void add_h(int i, int j, int slot, Real* const own[3]) const { add(i, j, slot, own, false); }

 private:
  struct Term {
    bool electric;
    int component, k;
    double factor;  ///< field per unit of waveform
    std::size_t dipole;
  };
  void add(int i, int j, int slot, Real* const own[3], bool electric) const;

  std::vector<Dipole> dipoles_;
  double dt_s_;
  std::vector<double> now_;  // [slot][dipole]
  std::map<std::pair<int, int>, std::vector<Term>> rows_;
};

}  // namespace wanewall
