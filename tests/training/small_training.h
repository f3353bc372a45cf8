#pragma once

#include <fmt/format.h>

#include <algorithm>
#include <random>
#include <vector>

#include "lightcurve/synthetic_survey.h"
#include "template/gauged_template.h"
#include "training/run_training.h"

namespace thirdrung::testing {

/// Coarse grids, so that a whole training takes seconds.
inline TemplateBasesOptions small_bases() {
  TemplateBasesOptions out;
  out.wavelength_first = 2700;
  out.wavelength_last = 9500;
  out.usable_blue = 2800;
  out.usable_red = 9300;
  out.phase_step = 4;
  out.fine_step = 330;
  out.coarse_step = 400;
  return out;
}

/// Two invented surveys' bands; those of the first double as gauge ("blue", "green").
inline PassbandCatalogue two_catalogues() {
  PassbandCatalogue out = invented_catalogue();
  out.add(invented_band("azure", 4250, 5450));
  out.add(invented_band("amber", 5500, 6900));
  out.add(invented_band("ruby", 6900, 8300));
  return out;
}

/// A template of invented shape, exactly representable on the small bases, in its gauge.
inline SpectralTemplate true_template(const PassbandCatalogue& catalogue) {
  SpectralTemplate out = start_template(small_bases(), catalogue, "blue", "green");
  out.name = "truth";
  // Smoothed: features finer than the knots would alias.
  const auto smooth = [](double q, double w) {
    double sum = 0;
    for (int k = -3; k <= 3; ++k) sum += invented_log_flux(q, w + 110 * k) / 7;
    return sum;
  };
  out.log_flux = fit_surface(out.phase_basis, out.wavelength_basis, [&](double q, double w) { return smooth(q, w); });
  out.stretch_response = fit_surface(out.stretch_phase_basis, out.stretch_wavelength_basis, [](double q, double w) {
    const double x = (w - 4400) / 1000;
    return 0.1 * x + 0.006 * q * x + 0.3 * std::exp(-0.5 * std::pow((q - 25) / 10, 2)) * x / (1 + x * x);
  });
  const auto centres = out.colour_basis.centres();
  Eigen::VectorXd k(out.colour_basis.size());
  for (int i = 0; i < out.colour_basis.size(); ++i) {
    k(i) = 2.29 * (1e4 / centres[static_cast<std::size_t>(i)] - 1 / 0.44);
  }
  out.colour_law = collocation(out.colour_basis).partialPivLu().solve(k);
  put_into_gauge(out);
  // The shift of the peak and the magnitude there act on each other: again, until both hold.
  put_into_gauge(out);
  out.log_epoch_scatter.setConstant(std::log(0.02));
  out.log_colour_scatter.setConstant(std::log(0.02));
  return out;
}

struct SimulatedTraining {
  PassbandCatalogue catalogue;
  SpectralTemplate truth;
  std::vector<TrainingCandidate> candidates;
  std::vector<Truth> truths;
};

struct SimulatedTrainingOptions {
  int supernovae = 60;
  double s_width = 0.1, c_width = 0.1;
  double noise = 0.02;  ///< Of the flux at maximum.
  bool scatter = true;
  double cadence = 5;
  unsigned seed = 1;
  bool paired = true;  ///< Means of the sample exactly those of the convention, see below; else plain Gaussian draws.
};

/// Supernovae of two invented surveys, 0.01 < z < 0.2.
///
/// What the mean supernova is, is a convention and no subject of these tests, so the sample has what the convention
/// asks for exactly: light curves leave two directions to the prior, a shift of all colours (with Φ along K), whose
/// optimum has Σ c = 0, and a common factor on all stretches (with the time axis of Φ), whose optimum has Σ s (s − 1) =
/// n w². Hence pairs of opposite c, and pairs of s about 1 whose width is that of the prior.
inline SimulatedTraining simulated_training(const SimulatedTrainingOptions& options) {
  SimulatedTraining out{two_catalogues(), {}, {}, {}};
  out.truth = true_template(out.catalogue);
  std::mt19937_64 generator(options.seed);
  std::normal_distribution<double> normal;
  std::uniform_real_distribution<double> uniform;
  std::vector<double> s_draws;
  for (int k = 0; k < options.supernovae; k += options.paired ? 4 : 1) {
    s_draws.push_back(std::clamp(normal(generator), -2.3, 2.3) * options.s_width);
  }
  if (options.paired) {
    double squares = 0;
    for (const double x : s_draws) squares += x * x / static_cast<double>(s_draws.size());
    for (double& x : s_draws) x *= options.s_width / std::sqrt(squares);
  }
  double c = 0;
  for (int k = 0; k < options.supernovae; ++k) {
    if (k % 4 == 0 || !options.paired) c = normal(generator) * options.c_width;
    const double s = s_draws[static_cast<std::size_t>(options.paired ? k / 4 : k)];
    Truth truth;
    truth.s = options.paired && k % 4 >= 2 ? 1 - s : 1 + s;
    truth.c = options.paired && k % 2 == 1 ? -c : c;
    truth.z = 0.01 + 0.19 * uniform(generator);
    truth.t_0 = 58000 + 300 * uniform(generator);
    truth.m_b = 15 + 5 * truth.z;
    truth.ebv = 0.1 * uniform(generator);
    const bool first = (k / 4) % 2 == 0;
    const std::string name = fmt::format("invented-{}", k + 1);
    TrainingCandidate candidate;
    candidate.supernova = supernova_of(truth, name);
    candidate.supernova.survey = first ? "heron" : "egret";
    candidate.supernova.peak_mjd_guess = truth.t_0 + 2 * (uniform(generator) - 0.5);
    const std::vector<std::string> bands = first ? std::vector<std::string>{"violet", "blue", "green", "red", "dark"}
                                                 : std::vector<std::string>{"blue", "azure", "amber", "ruby"};
    candidate.light_curve = observe(truth, out.truth, out.catalogue, bands, -12 - uniform(generator), 40,
                                    options.cadence, options.noise, &generator, options.scatter);
    candidate.light_curve.supernova = name;
    candidate.light_curve.survey = candidate.supernova.survey;
    out.candidates.push_back(std::move(candidate));
    out.truths.push_back(truth);
  }
  return out;
}

/// The prepared supernovae with their true unknowns.
struct PreparedTraining {
  std::vector<TrainingSupernova> supernovae;
  std::vector<SupernovaUnknowns> unknowns;
  std::vector<Eigen::VectorXd> weights;
};

inline PreparedTraining prepared(const SimulatedTraining& simulated) {
  PreparedTraining out;
  for (std::size_t k = 0; k < simulated.candidates.size(); ++k) {
    const Truth& truth = simulated.truths[k];
    out.supernovae.push_back(prepare_supernova(simulated.candidates[k].light_curve, simulated.candidates[k].supernova,
                                               truth.t_0, simulated.truth, simulated.catalogue, Extinction(),
                                               {-15, 45}));
    out.unknowns.push_back({truth.t_0, truth.m_b, truth.s, truth.c});
    out.weights.push_back(Eigen::VectorXd::Ones(static_cast<Eigen::Index>(out.supernovae.back().epochs.size())));
  }
  return out;
}

}  // namespace thirdrung::testing
