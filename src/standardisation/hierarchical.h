#pragma once

#include <cstdint>
#include <optional>
#include <span>

#include "standardisation/population_likelihood.h"
#include "standardisation/standardisation.h"

namespace thirdrung {

/// Settings of the hierarchical standardisation.
struct HierarchicalOptions {
  HostMassOptions host_mass;
  /// Coefficients held at a value instead of fitted.
  std::optional<double> alpha, beta, gamma, sigma_int;
  /// A mean stretch and colour of its own for every survey (widths shared): for surveys that select differently, which
  /// at different depths also carries a change of the population with redshift. A supernova of several surveys goes
  /// with the first; surveys with fewer than smallest_group supernovae share one population.
  bool population_per_survey = false;
  std::size_t smallest_group = 10;
  /// A width or sigma_int that falls below this is held at it, and a remark says so [stretch; mag].
  double smallest_width = 1e-3;
  /// Widths and sigma_int of maximum likelihood are low because the fitted means and slopes follow the noise, as a
  /// variance about a fitted mean is (sigma_int by about a quarter of its error for 300 supernovae). Corrected, unless
  /// this is off, by the step that the restricted likelihood asks for, -2 ln L + ln det F with F the expected curvature
  /// in intercept, slopes and means (Patterson & Thompson 1971, Biometrika 58, 545; Cox & Reid 1987, J. R. Stat. Soc. B
  /// 49, 1).
  bool restricted_widths = true;
  int most_iterations = 500;
};

/// Maximum of the marginal likelihood of March et al. 2011 (see population_likelihood.h), errors from its curvature.
///
/// Maximised with a quasi-Newton search (Ceres) in coordinates scaled by the expected curvature, then polished with
/// Newton steps on the exact Hessian; then the widths are corrected (restricted_widths) and the rest is maximised given
/// them. The covariance is twice the inverse Hessian of -2 ln L, carried from the logarithms of widths to the widths.
/// gamma is held at 0, with a remark, if no host has a mass or all fall on one side of the step. Throws NoResultError
/// for fewer than 10 supernovae or if the search does not converge, InputError for bad data (check_data).
StandardisationResult fit_hierarchical(std::span<const StandardisationDatum> data,
                                       const HierarchicalOptions& options = {});

/// The data as the likelihood takes them, and how their groups are called.
struct PopulationData {
  std::vector<PopulationDatum> data;
  std::vector<std::string> groups;  ///< One name, "", if there is one population.
  PopulationLayout layout() const { return {groups.size()}; }
};
PopulationData population_data(std::span<const StandardisationDatum> data, const HierarchicalOptions& options);

/// The likelihood's own parameters (logarithms of widths) of a result, in the order of PopulationLayout.
Eigen::VectorXd likelihood_parameters(const StandardisationResult& result);

}  // namespace thirdrung
