#pragma once

#include <cmath>
#include <random>
#include <string>
#include <vector>

#include "lightcurve/fit.h"
#include "lightcurve/synthetic_template.h"

namespace thirdrung::testing {

inline CalibratedPassband invented_band(const std::string& id, double blue, double red) {
  std::vector<double> wavelength;
  std::vector<double> throughput;
  constexpr double edge = 150;
  for (double w = blue - edge; w <= red + edge; w += 25) {
    wavelength.push_back(w);
    throughput.push_back(std::clamp((std::min(w - blue, red - w) / edge + 1) / 2, 0.0, 1.0));
  }
  CalibratedPassband out{Passband(id, wavelength, throughput, Response::photon)};
  return out;
}

/// Five invented bands of AB magnitudes; "violet" is soon outside the template.
inline PassbandCatalogue invented_catalogue() {
  PassbandCatalogue out;
  out.add(invented_band("violet", 3150, 3800));
  out.add(invented_band("blue", 3900, 5000));
  out.add(invented_band("green", 4900, 5900));
  out.add(invented_band("red", 5900, 7200));
  out.add(invented_band("dark", 7200, 8600));
  return out;
}

/// True parameters of a made-up supernova.
struct Truth {
  double t_0 = 58000;
  double m_b = 16.5;
  double s = 1.0;
  double c = 0.05;
  double z = 0.03;
  double ebv = 0.05;
};

inline Supernova supernova_of(const Truth& truth, const std::string& name = "invented-1") {
  Supernova out;
  out.name = name;
  out.survey = "invented";
  out.z_helio = truth.z;
  out.mw_ebv = truth.ebv;
  return out;
}

/// A light curve every `cadence` days from phase `first` to `last` with flux errors of `noise` times the peak flux;
/// with a generator also scattered by them, by ε and by κ.
inline LightCurve observe(const Truth& truth, const SpectralTemplate& model, const PassbandCatalogue& catalogue,
                          const std::vector<std::string>& bands, double first, double last, double cadence,
                          double noise, std::mt19937_64* generator = nullptr, bool scatter = true) {
  LightCurve out;
  out.supernova = "invented-1";
  out.survey = "invented";
  out.passbands = bands;
  std::normal_distribution<double> normal;
  const auto draw = [&] { return generator ? normal(*generator) : 0.0; };
  for (std::size_t b = 0; b < bands.size(); ++b) {
    const BandWeights weights = band_weights(catalogue.at(bands[b]).passband, truth.z, Extinction(), truth.ebv, 5.0);
    const double common = scatter ? draw() * model.colour_scatter(weights.mean_wavelength) : 0.0;
    const double amplitude = std::pow(10.0, -0.4 * truth.m_b);
    const double peak = amplitude * integrate_band(model, weights, 0, truth.s, truth.c).flux;
    for (double p = first + 0.1 * static_cast<double>(b); p <= last; p += cadence) {
      const double flux = amplitude * integrate_band(model, weights, p / truth.s, truth.s, truth.c).flux;
      const double epoch = scatter ? draw() * model.epoch_scatter(p, weights.mean_wavelength) : 0.0;
      Epoch one;
      one.mjd = truth.t_0 + p * (1 + truth.z);
      one.passband = b;
      one.flux_error = noise * peak;
      one.flux = flux * (1 + common + epoch) + one.flux_error * draw();
      one.row = out.epochs.size() + 1;
      out.epochs.push_back(one);
    }
  }
  return out;
}

}  // namespace thirdrung::testing
