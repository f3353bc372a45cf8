#pragma once

#include <Eigen/Core>
#include <vector>

#include "light/passband_catalogue.h"
#include "lightcurve/photometry.h"
#include "simulation/draw_calibrators.h"
#include "simulation/draw_supernova.h"
#include "simulation/simulation_options.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// A calibrator and its host, by number.
struct SimulatedCalibrator {
  std::string supernova;
  std::size_t host = 0;
};

/// Surveys that never happened, as their tables would have them, with the truth beside.
struct SimulatedSample {
  PassbandCatalogue catalogue;           ///< As the surveys believe it: without the shifts that were put in.
  std::vector<Supernova> supernovae;     ///< A row a survey and supernova, survey by survey.
  std::vector<LightCurve> light_curves;  ///< One each, in the same order.
  std::vector<SupernovaTruth> truths;    ///< A row a supernova, in order of first appearance.
  double a_b = 0;                        ///< True intercept.
  std::vector<SimulatedHost> hosts;      ///< Of the calibrators, their distances as measured.
  std::vector<SimulatedCalibrator> calibrators;
};

/// Draws supernovae, observes them, and keeps drawing until every survey has found as many as it asks for.
///
/// The same options give the same sample, whatever the number of threads. Throws InputError for options that
/// check_simulation() refuses, or under which nothing is ever found.
SimulatedSample simulate(const SimulationOptions& options, const SpectralTemplate& model);

/// Errors of light-curve parameters, for simulating without light curves.
struct SummaryErrors {
  double m_b = 0.04, s = 0.03, c = 0.03;  ///< 1σ of a typical supernova [mag, 1, mag].
  double spread = 0.5;                    ///< Every supernova's errors are these times 1 ± spread, evenly.
  double m_b_with_s = 0.2, m_b_with_c = 0.6, s_with_c = 0.1;  ///< Correlations.
};

/// A supernova as its light-curve fit would give it.
struct SimulatedSummary {
  Supernova supernova;
  Eigen::Vector3d measured;    ///< (m_B, s, c).
  Eigen::Matrix3d covariance;  ///< Of the measured values.
  SupernovaTruth truth;
};

/// The same supernovae without light curves: (m_B, s, c) drawn with a given covariance. Microseconds a supernova, for
/// closure tests with thousands of surveys. Bands, cadence and detections are not used; peak_limit is, on the measured
/// m_B. Throws as simulate().
std::vector<SimulatedSummary> simulate_summaries(const SimulationOptions& options, const SummaryErrors& errors = {});

}  // namespace thirdrung
