// Keys of the illumination.
#include "io/scene/forms.hpp"
#include "io/scene/keys.hpp"

namespace wanewall::scene {
namespace {

const Block& direction() {
  static const Block b{
      "from",
      "Where the wave comes from.",
      {required("theta", quantity(Family::angle, {0.0, 180 * degree, false, false}),
                "Angle from +z: 0 deg comes straight down."),
       with_default("phi", quantity(Family::angle, {-360 * degree, 360 * degree, false, false}), "0 deg",
                    "Angle from +x towards +y.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& plane_wave() {
  static const Block b{
      "plane_wave",
      "A plane wave through a closed surface: total field inside it, scattered field outside.",
      {required("from", block(direction()), "Where the wave comes from."),
       with_default("e_angle", quantity(Family::angle, {-360 * degree, 360 * degree, false, false}), "0 deg",
                    "Turns E from the theta unit vector towards the phi unit vector."),
       with_default("peak", above_zero(Family::electric_field), "1 V/m", "Multiplies the pulse."),
       with_default("surface_inset", quantity(Family::cells, {4.0, 10000.0, false, false}), "6 cells",
                    "How far inside the clear volume the surface lies; the planes of the shell audit stay "
                    "outside it.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& dipole() {
  static const Block b{"dipoles[]",
                       "A point dipole; its current is the moment times the pulse.",
                       {optional("electric", list_of(quantity(Family::current_moment), 3, 3),
                                 "Current moment I l along x, y, z."),
                        optional("magnetic", list_of(quantity(Family::voltage_moment), 3, 3),
                                 "Magnetic moment K l along x, y, z."),
                        required("at", position(), "Where it is, inside the clear volume.")},
                       {{"electric", "magnetic"}},
                       {},
                       {},
                       {}};
  return b;
}

const Block& modulated_gaussian() {
  static const Block b{"modulated_gaussian",
                       "exp(-u^2/2) sin(2 pi centre (t - delay)), u = (t - delay) / width.",
                       {required("centre", above_zero(Family::frequency), "Frequency under the Gaussian."),
                        required("width", above_zero(Family::time), "Standard deviation of the Gaussian.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& gaussian() {
  static const Block b{"gaussian",
                       "exp(-u^2/2), u = (t - delay) / width. It has a mean and leaves charge behind.",
                       {required("width", above_zero(Family::time), "Standard deviation.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& differentiated_gaussian() {
  static const Block b{"differentiated_gaussian",
                       "-u exp((1 - u^2)/2), u = (t - delay) / width.",
                       {required("width", above_zero(Family::time), "Standard deviation.")},
                       {},
                       {},
                       {},
                       {}};
  return b;
}

const Block& ricker() {
  static const Block b{
      "ricker",
      "(1 - u^2) exp(-u^2/2), u = (t - delay) / width.",
      {optional("width", above_zero(Family::time), "Standard deviation of the Gaussian it is derived from."),
       optional("peak_frequency", above_zero(Family::frequency),
                "Where its spectrum is largest: sqrt(2) / (2 pi width).")},
      {{"width", "peak_frequency"}},
      {},
      {},
      {}};
  return b;
}

const Block& samples() {
  static const Block b{
      "samples",
      "A waveform from a file, joined by straight lines, zero outside, scaled to unit peak.",
      {required("file", text(),
                "CSV file beside the scene, two columns: time in s, value; one header line is allowed.")},
      {},
      {},
      {},
      {}};
  return b;
}

const Block& pulse() {
  static const Block b{
      "pulse",
      "The waveform of all sources.",
      {optional("fits", words({"band"}),
                "A modulated Gaussian that is 12 dB below its peak at both ends of the band."),
       optional("modulated_gaussian", block(modulated_gaussian()), "A Gaussian times a sine; no mean."),
       optional("gaussian", block(gaussian()), "A Gaussian."),
       optional("differentiated_gaussian", block(differentiated_gaussian()), "Slope of a Gaussian; no mean."),
       optional("ricker", block(ricker()), "Curvature of a Gaussian; no mean."),
       optional("samples", block(samples()), "Samples from a CSV file."),
       derived("delay", not_negative(Family::time), "7 widths; 0 s for samples",
               "Time of the pulse's middle; for samples, how much later they start.")},
      {{"fits", "modulated_gaussian", "gaussian", "differentiated_gaussian", "ricker", "samples"}},
      {},
      {},
      {}};
  return b;
}

}  // namespace

const Block& illumination_block() {
  static const Block b{
      "illumination",
      "What lights the scene.",
      {optional("plane_wave", block(plane_wave()), "A plane wave."),
       optional("dipoles", list_of(block(dipole()), 1, 10000), "Point dipoles."),
       with_default("pulse", block(pulse()), "{fits: band}", "The waveform of all of them.")},
      {},
      {},
      {{"plane_wave", "dipoles"}},
      {}};
  return b;
}

}  // namespace wanewall::scene
