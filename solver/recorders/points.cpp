#include "solver/recorders/points.hpp"

#include "geometry/constants.hpp"

namespace wanewall {

template <class Real>
PointRecorder<Real>::PointRecorder(const Lattice& lattice, const std::vector<PointRequest>& requests,
                                   Captures<Real>& captures)
    : captures_(captures), corners_(requests.size()) {
  const int set = captures.new_set();
  for (std::size_t n = 0; n < requests.size(); ++n) {
    PointSeries series;
    series.name = requests[n].name;
    series.position_m = requests[n].position_m;
    for (auto& values : series.values) values.push_back(0.0);  // step 0: nothing has moved yet
    series_.push_back(std::move(series));
    for (Component c : all_components) {
      Corner& corner = corners_[n][static_cast<std::size_t>(index_of(c))];
      CaptureBox box;
      box.component = c;
      for (std::size_t a = 0; a < 3; ++a) {
        corner.pair[a] = linear_pair(lattice, c, static_cast<Axis>(a), requests[n].position_m[a]);
        box.first[a] = corner.pair[a].lower;
        box.count[a] = corner.count[a] = corner.pair[a].upper - corner.pair[a].lower + 1;
      }
      corner.size = box.size();
      corner.capture = captures.add(set, box);
    }
  }
}

template <class Real>
void PointRecorder<Real>::before_block(const StepBlock& block) {
  n_slots_ = block.n;
  const auto n_slots = static_cast<std::size_t>(block.n);
  for (auto& point : corners_) {
    for (Corner& corner : point) {
      if (corner.values.size() < n_slots * corner.size) corner.values.resize(n_slots * corner.size);
      for (std::size_t slot = 0; slot < n_slots; ++slot)
        captures_.aim(corner.capture, static_cast<int>(slot), corner.values.data() + slot * corner.size);
    }
  }
}

template <class Real>
double PointRecorder<Real>::value(const Corner& corner, int slot) {
  const auto weight = [&](std::size_t a, int upper) {
    return upper ? corner.pair[a].upper_weight : 1.0 - corner.pair[a].upper_weight;
  };
  const Real* at = corner.values.data() + static_cast<std::size_t>(slot) * corner.size;
  double sum = 0.0;
  for (int x = 0; x < corner.count[0]; ++x)
    for (int y = 0; y < corner.count[1]; ++y)
      for (int z = 0; z < corner.count[2]; ++z)
        sum += weight(0, x) * weight(1, y) * weight(2, z) * static_cast<double>(*at++);
  return sum;
}

template <class Real>
void PointRecorder<Real>::after_block() {
  for (std::size_t n = 0; n < corners_.size(); ++n) {
    for (Component c : all_components) {
      const auto component = static_cast<std::size_t>(index_of(c));
      for (int slot = 0; slot < n_slots_; ++slot) {
        const double sum = value(corners_[n][component], slot);
        series_[n].values[component].push_back(is_electric(c) ? sum : sum / eta0_ohm);
      }
    }
  }
}

template class PointRecorder<float>;
template class PointRecorder<double>;

}  // namespace wanewall
