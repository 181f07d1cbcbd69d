#include "solver/recorders/audit.hpp"

#include <algorithm>
#include <cmath>

#include "geometry/constants.hpp"

namespace wanewall {
namespace {

/// Node of plane m, and half index of half plane m, on a side (see AuditFace).
int plane_node(const Lattice& lattice, Side side, int m) {
  return is_high(side) ? lattice.clear_node(side) - 2 + m : lattice.clear_node(side) + 2 - m;
}
int half_plane_index(const Lattice& lattice, Side side, int m) {
  return is_high(side) ? lattice.clear_node(side) - 2 + m : lattice.clear_node(side) + 1 - m;
}

std::array<Axis, 2> tangential_axes(Side side) {
  switch (axis_of(side)) {
    case Axis::x:
      return {Axis::y, Axis::z};
    case Axis::y:
      return {Axis::x, Axis::z};
    default:
      return {Axis::x, Axis::y};
  }
}

AuditPlane make_plane(const Lattice& lattice, Side side, Component c, int m) {
  const Axis normal = axis_of(side);
  AuditPlane plane;
  plane.component = c;
  plane.normal_index = is_half(c, normal) ? half_plane_index(lattice, side, m) : plane_node(lattice, side, m);
  plane.normal_m = lattice.position_m(c, normal, plane.normal_index);
  const auto [first, second] = tangential_axes(side);
  plane.shape = {lattice.stored(c, first).size(), lattice.stored(c, second).size()};
  return plane;
}

/// Looks at what the update is made of on a face's planes and beyond them, over the whole cross-section.
/// Nodes on the outer walls are left out: walls have their own rules.
class CrossSection {
 public:
  CrossSection(const Problem& problem, const Painter& painter, Side side)
      : lattice_(problem.lattice), painter_(painter), side_(side) {
    // E and H at the planes: nodes 0..2 and half planes -1..1.
    for (Component c : all_components) {
      const IndexRange near = planes(c), x = range(c, Axis::x, near), y = range(c, Axis::y, near);
      painter_.row(c, x.begin, y.begin, range(c, Axis::z, near), reference_[at(c)]);
    }
  }

  bool is_uniform() const {
    for (Component c : all_components)
      for (const Paint& paint : reference_[at(c)])
        if (!(paint == any(c)) || paint.perfect) return false;
    return agrees(Part::planes, true);
  }
  bool clear_is_uniform() const { return agrees(Part::clear_planes, true); }
  bool is_layered() const {
    if (axis_of(side_) == Axis::z) return is_uniform();
    for (Component c : all_components)
      for (const Paint& paint : reference_[at(c)])
        if (paint.perfect) return false;
    return reference_[at(Component::ex)] == reference_[at(Component::ey)] &&
           reference_[at(Component::hx)] == reference_[at(Component::hy)] && agrees(Part::planes, false);
  }
  bool goes_on_to_wall(bool uniform) const { return agrees(Part::beyond, uniform); }

  /// The paint in the middle of the reference row.
  const Paint& any(Component c) const {
    const auto& row = reference_[at(is_electric(c) ? Component::ex : Component::hx)];
    return row[row.size() / 2];
  }
  /// Whole-axis profile: the outer nodes, which do not move, take after their neighbours.
  LayeredProfile profile() const {
    LayeredProfile p;
    const auto fill = [&](Component c, std::vector<double>& relative, std::vector<double>& loss) {
      std::vector<Paint> row = reference_[at(c)];
      if (!is_half(c, Axis::z)) {
        row.insert(row.begin(), row.front());
        row.push_back(row.back());
      }
      for (const Paint& paint : row) {
        relative.push_back(paint.relative);
        loss.push_back(paint.loss);
      }
    };
    fill(Component::ex, p.permittivity_rel_node, p.conductivity_s_per_m_node);
    fill(Component::ez, p.permittivity_rel_half, p.conductivity_s_per_m_half);
    fill(Component::hz, p.permeability_rel_node, p.magnetic_conductivity_ohm_per_m_node);
    fill(Component::hx, p.permeability_rel_half, p.magnetic_conductivity_ohm_per_m_half);
    return p;
  }

 private:
  enum class Part { planes, clear_planes, beyond };
  static std::size_t at(Component c) { return static_cast<std::size_t>(index_of(c)); }

  IndexRange planes(Component c) const {
    const bool half = is_half(c, axis_of(side_));
    const int a = half ? half_plane_index(lattice_, side_, -1) : plane_node(lattice_, side_, 0);
    const int b = half ? half_plane_index(lattice_, side_, 1) : plane_node(lattice_, side_, 2);
    return {std::min(a, b), std::max(a, b) + 1};
  }
  IndexRange beyond(Component c) const {
    const Axis normal = axis_of(side_);
    const IndexRange near = planes(c);
    const int wall = is_half(c, normal) ? 0 : 1;  // the wall's own nodes are left out
    if (is_high(side_)) return {near.end, lattice_.stored(c, normal).end - wall};
    return {wall, near.begin};
  }
  IndexRange range(Component c, Axis a, IndexRange along_normal) const {
    if (a == axis_of(side_)) return along_normal;
    const IndexRange all = lattice_.stored(c, a);
    return is_half(c, a) || all.size() < 3 ? all : IndexRange{all.begin + 1, all.end - 1};
  }
  // The clear indices without the rim, where an object that ends at the shell is half inside.
  IndexRange inner_clear(Component c, Axis a) const {
    const IndexRange clear = lattice_.clear(c, a);
    return is_half(c, a) || clear.size() < 3 ? clear : IndexRange{clear.begin + 1, clear.end - 1};
  }
  bool agrees(Part part, bool uniform) const {
    std::vector<Paint> row;
    for (Component c : all_components) {
      const IndexRange along_normal = part == Part::beyond ? beyond(c) : planes(c);
      const auto along = [&](Axis a) {
        return part == Part::clear_planes && a != axis_of(side_) ? inner_clear(c, a)
                                                                 : range(c, a, along_normal);
      };
      const IndexRange x = along(Axis::x), y = along(Axis::y), z = along(Axis::z);
      for (int i = x.begin; i < x.end; ++i) {
        for (int j = y.begin; j < y.end; ++j) {
          painter_.row(c, i, j, z, row);
          for (std::size_t k = 0; k < row.size(); ++k)
            if (!(row[k] == (uniform ? any(c) : reference_[at(c)][k]))) return false;
        }
      }
    }
    return true;
  }

  const Lattice& lattice_;
  const Painter& painter_;
  Side side_;
  std::array<std::vector<Paint>, 6> reference_;
};

}  // namespace

int audit_sample_every(const Problem& problem) {
  const AuditRequest& audit = problem.recording.audit;
  if (audit.sample_every > 0) return audit.sample_every;
  double end_hz = 0.0;
  const auto look_at = [&](const Pulse& pulse) {
    end_hz = std::max(end_hz, spectrum_end_hz(pulse, audit_alias_level));
  };
  if (problem.plane_wave) look_at(problem.plane_wave->pulse);
  for (const Dipole& dipole : problem.dipoles) look_at(dipole.pulse);
  const double highest = *std::max_element(audit.frequencies_hz.begin(), audit.frequencies_hz.end());
  const double limit = 1.0 / (problem.lattice.dt_s * (highest + std::max(end_hz, highest)));
  return std::max(1, static_cast<int>(std::floor(limit)));
}

AuditFace audit_face(const Problem& problem, const Painter& painter, Side side) {
  const Lattice& lattice = problem.lattice;
  const Axis normal = axis_of(side);
  if (lattice.clear_cells(normal).size() < 4)
    throw ProblemError(
        "shell audit of " + std::string(name_of(side)) +
        ": the clear volume must be at least 4 cells deep in front of the face / make it larger or leave "
        "the face out of the audit");
  AuditFace face;
  face.side = side;
  const CrossSection section(problem, painter, side);
  face.is_uniform = section.is_uniform();
  face.clear_is_uniform = face.is_uniform || section.clear_is_uniform();
  face.is_layered = face.is_uniform || section.is_layered();
  face.goes_on_to_wall = (face.is_uniform || face.is_layered) && section.goes_on_to_wall(face.is_uniform);
  if (face.is_uniform) {
    const Paint &e = section.any(Component::ex), &h = section.any(Component::hx);
    face.permittivity_rel = e.relative;
    face.conductivity_s_per_m = e.loss;
    face.permeability_rel = h.relative;
    face.magnetic_conductivity_ohm_per_m = h.loss;
  } else {
    Vec3 middle{};
    for (Axis a : all_axes) {
      const IndexRange clear = lattice.clear_cells(a);
      middle[static_cast<std::size_t>(index_of(a))] =
          0.5 * (lattice.along(a).node_m(clear.begin) + lattice.along(a).node_m(clear.end));
    }
    middle[static_cast<std::size_t>(index_of(normal))] =
        lattice.along(normal).node_m(plane_node(lattice, side, 0));
    const Medium& medium = problem.media[static_cast<std::size_t>(painter.medium_at(middle))];
    face.permittivity_rel = medium.permittivity_rel;
    face.permeability_rel = medium.permeability_rel;
    face.conductivity_s_per_m = medium.conductivity_s_per_m;
    face.magnetic_conductivity_ohm_per_m = medium.magnetic_conductivity_ohm_per_m;
    if (face.is_layered) face.profile = section.profile();
  }
  const auto [first, second] = tangential_axes(side);

  if (face.is_layered && !face.is_uniform) {
    const Axis other = normal == Axis::x ? Axis::y : Axis::x;
    for (int m = 0; m < 3; ++m) face.planes.push_back(make_plane(lattice, side, Component::ez, m));
    for (int m = -1; m < 2; ++m) face.planes.push_back(make_plane(lattice, side, Component::hz, m));
    face.planes.push_back(make_plane(lattice, side, electric(other), 0));
    face.planes.push_back(make_plane(lattice, side, magnetic(other), 0));
  } else {
    for (Axis along : {first, second})
      for (int m = 0; m < 3; ++m) face.planes.push_back(make_plane(lattice, side, electric(along), m));
    for (Axis along : {first, second}) face.planes.push_back(make_plane(lattice, side, magnetic(along), 0));
  }
  return face;
}

template <class Real>
AuditRecorder<Real>::AuditRecorder(const Problem& problem, Captures<Real>& captures)
    : dt_s_(problem.lattice.dt_s), captures_(captures) {
  const AuditRequest& request = problem.recording.audit;
  record_.frequencies_hz = request.frequencies_hz;
  if (request.frequencies_hz.empty()) return;
  record_.sample_every = audit_sample_every(problem);
  record_.shell = problem.faces;
  const Painter painter(problem.lattice, problem.media, problem.objects, problem.background);
  const int set = captures.new_set();
  for (Side side : all_sides) {
    if (!request.faces[static_cast<std::size_t>(index_of(side))]) continue;
    record_.faces.push_back(audit_face(problem, painter, side));
    const AuditFace& face = record_.faces.back();
    const auto normal = static_cast<std::size_t>(index_of(axis_of(side)));
    const auto tangential = tangential_axes(side);
    for (std::size_t p = 0; p < face.planes.size(); ++p) {
      CaptureBox box;
      box.component = face.planes[p].component;
      box.first[normal] = face.planes[p].normal_index;
      for (std::size_t t = 0; t < 2; ++t)
        box.count[static_cast<std::size_t>(index_of(tangential[t]))] = face.planes[p].shape[t];
      Plane plane{record_.faces.size() - 1, p, captures.add(set, box), box.size(), {}, {}};
      plane.block = AlignedArray<Real>(plane.size * audit_most_samples + sum_group);
      plane.sums = AlignedArray<double>(plane.n_groups() * sums_per_group());
      std::fill_n(plane.sums.data(), plane.sums.size(), 0.0);
      planes_.push_back(std::move(plane));
    }
  }
}

template <class Real>
void AuditRecorder<Real>::before_block(const StepBlock& block) {
  n_new_ = 0;
  for (long step = block.first; step < block.end(); ++step) {
    if (planes_.empty() || !samples(step)) continue;
    const std::size_t place = kept_steps_.size();
    kept_steps_.push_back(step);
    ++n_new_;
    for (Plane& plane : planes_)
      captures_.aim(plane.capture, static_cast<int>(step - block.first),
                    plane.block.data() + plane.size * place);
  }
}

template <class Real>
void AuditRecorder<Real>::add_kept(Plane& plane, std::size_t begin, std::size_t end) {
  const bool electric = is_electric(record_.faces[plane.face].planes[plane.plane].component);
  const std::size_t n_samples = kept_steps_.size();
  // [frequency][sample]
  std::vector<double> cosine, minus_sine;
  for (const double frequency_hz : record_.frequencies_hz) {
    for (const long step : kept_steps_) {
      const double phase =
          2.0 * pi * frequency_hz * (electric ? time_of_e_s(step, dt_s_) : time_of_h_s(step, dt_s_));
      cosine.push_back(std::cos(phase));
      minus_sine.push_back(-std::sin(phase));
    }
  }
  SampleBlock<Real> block;
  block.samples = plane.block.data() + begin * sum_group;
  block.sample_stride = plane.size;
  block.n_samples = n_samples;
  block.cosine = cosine.data();
  block.minus_sine = minus_sine.data();
  block.n_frequencies = record_.frequencies_hz.size();
  block.sums = plane.sums.data() + begin * sums_per_group();
  block.n_groups = end - begin;
  add_samples_(block);
}

template <class Real>
void AuditRecorder<Real>::after_block_shared(int thread, int threads) {
  if (!is_full()) return;
  for (Plane& plane : planes_) {
    const auto t = static_cast<std::size_t>(thread), n = static_cast<std::size_t>(threads);
    add_kept(plane, plane.n_groups() * t / n, plane.n_groups() * (t + 1) / n);
  }
}

template <class Real>
void AuditRecorder<Real>::after_block() {
  if (is_full()) kept_steps_.clear();
}

template <class Real>
AuditRecord AuditRecorder<Real>::finish() {
  for (Plane& plane : planes_) {
    add_kept(plane, 0, plane.n_groups());
    AuditPlane& out = record_.faces[plane.face].planes[plane.plane];
    const double unit = record_.sample_every * dt_s_ * (is_electric(out.component) ? 1.0 : 1.0 / eta0_ohm);
    const std::size_t n_frequencies = record_.frequencies_hz.size();
    out.sums.resize(plane.size * n_frequencies);
    for (std::size_t f = 0; f < n_frequencies; ++f)
      for (std::size_t m = 0; m < plane.size; ++m) {
        const double* sum =
            plane.sums.data() + m / sum_group * sums_per_group() + 2 * f * sum_group + m % sum_group;
        out.sums[f * plane.size + m] = {unit * sum[0], unit * sum[sum_group]};
      }
    plane = Plane{};
  }
  planes_.clear();
  return std::move(record_);
}

template <class Real>
double AuditRecorder<Real>::bytes(const Problem& problem) {
  const AuditRequest& request = problem.recording.audit;
  if (request.frequencies_hz.empty()) return 0.0;
  double positions = 0.0;
  const Painter painter(problem.lattice, problem.media, problem.objects, problem.background);
  for (Side side : all_sides) {
    if (!request.faces[static_cast<std::size_t>(index_of(side))]) continue;
    for (const AuditPlane& plane : audit_face(problem, painter, side).planes)
      positions += static_cast<double>(plane.shape[0]) * plane.shape[1];
  }
  const double per_position = static_cast<double>(audit_block_samples * sizeof(Real)) +
                              2.0 * sizeof(double) * static_cast<double>(request.frequencies_hz.size());
  return positions * per_position;
}

template class AuditRecorder<float>;
template class AuditRecorder<double>;

}  // namespace wanewall
