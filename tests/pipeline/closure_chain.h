#pragma once

#include <cmath>
#include <span>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "hubbleflow/intercept.h"
#include "lightcurve/fit.h"
#include "sample/redshift_frames.h"
#include "simulation/simulate.h"
#include "standardisation/hierarchical.h"
#include "standardisation/selection.h"

namespace thirdrung::testing {

/// What an analysis makes of a simulated supernova's redshifts and host.
inline StandardisationDatum datum_of(const Supernova& supernova, const RedshiftOptions& frames) {
  const Redshifts z = redshifts_of(supernova, frames);
  StandardisationDatum out;
  out.name = supernova.name;
  out.surveys = {supernova.survey};
  out.host_log_mass = supernova.host_log_mass;
  out.host_log_mass_error = supernova.host_log_mass_error;
  out.z_helio = supernova.z_helio;
  out.z_flow = z.z_flow;
  out.modulus = 5 * std::log10(luminosity_distance(z.z_flow, supernova.z_helio, Expansion()));
  out.flow_variance = flow_variance(z.z_flow, frames.sigma_v, supernova.z_helio_error);
  return out;
}

/// Data of supernovae whose light curves were not simulated.
inline std::vector<StandardisationDatum> data_of(std::span<const SimulatedSummary> summaries,
                                                 const RedshiftOptions& frames) {
  std::vector<StandardisationDatum> out;
  for (const SimulatedSummary& one : summaries) {
    StandardisationDatum datum = datum_of(one.supernova, frames);
    datum.m_b = one.measured[0];
    datum.s = one.measured[1];
    datum.c = one.measured[2];
    datum.covariance = one.covariance;
    out.push_back(datum);
  }
  return out;
}

/// Data of the trusted fits.
inline std::vector<StandardisationDatum> data_of(std::span<const LightCurveFit> fits,
                                                 std::span<const Supernova> supernovae, const RedshiftOptions& frames) {
  std::vector<StandardisationDatum> out;
  for (std::size_t i = 0; i < fits.size(); ++i) {
    if (!fits[i].trusted()) continue;
    StandardisationDatum datum = datum_of(supernovae[i], frames);
    datum.m_b = fits[i].m_b;
    datum.s = fits[i].s;
    datum.c = fits[i].c;
    datum.covariance = fits[i].covariance.bottomRightCorner<3, 3>();
    out.push_back(datum);
  }
  return out;
}

/// From light-curve parameters to the intercept, each step with its default settings: redshift range and the usual
/// limits of colour and stretch, hierarchical standardisation (corrected for selection by magnitude limits, if there
/// are any), least squares.
inline InterceptResult intercept_of(std::span<const StandardisationDatum> all, double sigma_v,
                                    const MagnitudeLimits& limits = {}) {
  const InterceptOptions intercept;
  std::vector<StandardisationDatum> data;
  for (const StandardisationDatum& datum : all) {
    const bool usual = std::abs(datum.c) < 0.3 && datum.s > 0.75 && datum.s < 1.3;
    if (usual && datum.z_flow > intercept.z_min && datum.z_flow < intercept.z_max) data.push_back(datum);
  }
  const HierarchicalOptions options;
  const auto fit = [&](std::span<const StandardisationDatum> some) { return fit_hierarchical(some, options); };
  const StandardisationResult result = fit_selected(data, options.host_mass, limits, fit);
  FlowSample sample;
  Eigen::VectorXd variance(static_cast<Eigen::Index>(data.size()));
  for (std::size_t i = 0; i < data.size(); ++i) {
    FlowSupernova one;
    one.name = data[i].name;
    one.z_helio = data[i].z_helio;
    one.z_flow = data[i].z_flow;
    one.m_b_standardised = result.magnitudes[i].magnitude;
    variance[static_cast<Eigen::Index>(i)] = result.magnitudes[i].variance();
    sample.supernovae.push_back(one);
  }
  variance += velocity_scatter_part(sample.supernovae, Expansion(), sigma_v).diagonal;
  // The errors of alpha, beta and gamma count in the error, not in the weights: see CovarianceModel::weighting.
  const Eigen::MatrixXd common = coefficient_shifts(data, result, options.host_mass);
  sample.weighting = variance.asDiagonal();
  sample.covariance = sample.weighting + common * common.transpose();
  return fit_intercept(sample, intercept);
}

/// Mean and width of the pulls of a_B, and its mean error.
struct Closure {
  double pull_sum = 0, pull_squares = 0, offset_sum = 0, error_sum = 0;
  int count = 0;

  void add(const InterceptResult& result, double truth) {
    const double off = result.a_b - truth;
    pull_sum += off / result.error;
    pull_squares += off * off / (result.error * result.error);
    offset_sum += off;
    error_sum += result.error;
    ++count;
  }
  double mean_pull() const { return pull_sum / count; }
  double pull_width() const { return std::sqrt(pull_squares / count - mean_pull() * mean_pull()); }
};

}  // namespace thirdrung::testing
