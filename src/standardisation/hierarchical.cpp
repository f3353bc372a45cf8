#include "standardisation/hierarchical.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <map>
#include <stdexcept>

#include "base/error.h"
#include "standardisation/maximise.h"
#include "standardisation/shrink.h"

namespace thirdrung {

namespace {

using Layout = PopulationLayout;

Eigen::Index index(std::size_t i) {
  return static_cast<Eigen::Index>(i);
}

/// Moments of the data: where the search starts.
Eigen::VectorXd start_values(const PopulationData& data) {
  const auto n = static_cast<double>(data.data.size());
  Eigen::Vector3d mean = Eigen::Vector3d::Zero();
  Eigen::Matrix3d noise = Eigen::Matrix3d::Zero();
  for (const PopulationDatum& d : data.data) {
    mean += d.x / n;
    noise += d.covariance / n;
  }
  Eigen::Matrix3d spread = Eigen::Matrix3d::Zero();
  for (const PopulationDatum& d : data.data) spread += (d.x - mean) * (d.x - mean).transpose() / n;
  const auto width2 = [&](Eigen::Index k) { return std::max(spread(k, k) - noise(k, k), 0.1 * spread(k, k)); };
  const double s2 = width2(1);
  const double c2 = width2(2);
  const double alpha = std::clamp(-(spread(0, 1) - noise(0, 1)) / s2, -3.0, 5.0);
  const double beta = std::clamp((spread(0, 2) - noise(0, 2)) / c2, -2.0, 6.0);
  Eigen::VectorXd p(index(data.layout().size()));
  p[Layout::intercept] = mean[0] + alpha * (mean[1] - 1.0) - beta * mean[2];
  p[Layout::alpha] = alpha;
  p[Layout::beta] = beta;
  p[Layout::gamma] = 0.0;
  p[Layout::ln_sigma] = std::log(0.1);
  p[Layout::ln_s_width] = 0.5 * std::log(s2);
  p[Layout::ln_c_width] = 0.5 * std::log(c2);
  for (std::size_t g = 0; g < data.groups.size(); ++g) {
    p[index(Layout::first_mean + 2 * g)] = mean[1];
    p[index(Layout::first_mean + 2 * g + 1)] = mean[2];
  }
  return p;
}

std::vector<std::string> parameter_names(const PopulationData& data) {
  std::vector<std::string> names = {"intercept", "alpha", "beta", "gamma", "sigma_int", "s_width", "c_width"};
  for (const std::string& group : data.groups) {
    const std::string suffix = group.empty() ? "" : fmt::format("[{}]", group);
    names.push_back("s_mean" + suffix);
    names.push_back("c_mean" + suffix);
  }
  return names;
}

/// Can the step be told from the intercept? Needs hosts with different probabilities.
bool step_is_determined(const PopulationData& data) {
  double low = 1.0;
  double high = 0.0;
  for (const PopulationDatum& d : data.data) {
    low = std::min(low, d.mass_probability);
    high = std::max(high, d.mass_probability);
  }
  return high - low > 1e-3;
}

void hold(std::vector<bool>& held, Eigen::VectorXd& p, std::size_t place, double value) {
  held[place] = true;
  p[index(place)] = value;
}

}  // namespace

PopulationData population_data(std::span<const StandardisationDatum> data, const HierarchicalOptions& options) {
  std::map<std::string, std::size_t> count;
  const auto survey_of = [](const StandardisationDatum& d) {
    return d.surveys.empty() ? std::string() : d.surveys.front();
  };
  for (const StandardisationDatum& d : data) ++count[survey_of(d)];
  PopulationData result;
  const auto group_of = [&](const StandardisationDatum& d) -> std::size_t {
    std::string name;
    if (options.population_per_survey) {
      name = survey_of(d);
      if (count[name] < options.smallest_group) name = "others";
    }
    const auto it = std::find(result.groups.begin(), result.groups.end(), name);
    if (it != result.groups.end()) return static_cast<std::size_t>(it - result.groups.begin());
    result.groups.push_back(name);
    return result.groups.size() - 1;
  };
  for (const StandardisationDatum& d : data) {
    PopulationDatum p;
    p.x << d.m_b - d.modulus, d.s, d.c;
    p.covariance = d.covariance;
    p.covariance(0, 0) += d.flow_variance;
    p.mass_probability = host_mass_probability(d.host_log_mass, d.host_log_mass_error, options.host_mass);
    p.group = group_of(d);
    result.data.push_back(p);
  }
  return result;
}

Eigen::VectorXd likelihood_parameters(const StandardisationResult& result) {
  Eigen::VectorXd p(index(result.parameters.size()));
  for (std::size_t i = 0; i < result.parameters.size(); ++i) {
    const bool logarithmic = is_width(i);
    // A held width of zero: far below anything that matters.
    p[index(i)] = logarithmic ? std::log(std::max(result.parameters[i].value, 1e-12)) : result.parameters[i].value;
  }
  return p;
}

StandardisationResult fit_hierarchical(std::span<const StandardisationDatum> data, const HierarchicalOptions& options) {
  if (data.size() < 10) {
    throw NoResultError(fmt::format("standardisation needs at least 10 supernovae; {} are left.", data.size()));
  }
  check_data(data);
  const PopulationData population = population_data(data, options);
  const std::size_t size = population.layout().size();
  Eigen::VectorXd p = start_values(population);
  StandardisationResult result;
  result.supernovae = data.size();

  std::vector<bool> held(size, false);
  if (options.alpha) hold(held, p, Layout::alpha, *options.alpha);
  if (options.beta) hold(held, p, Layout::beta, *options.beta);
  if (options.gamma) hold(held, p, Layout::gamma, *options.gamma);
  if (options.sigma_int) hold(held, p, Layout::ln_sigma, std::log(std::max(*options.sigma_int, 1e-12)));
  if (!held[Layout::gamma] && !step_is_determined(population)) {
    hold(held, p, Layout::gamma, 0.0);
    result.remarks.emplace_back(
        "The host-mass step is held at 0: the hosts' masses are absent or all on one side of the step.");
  }
  FreeParameters free;
  Eigen::MatrixXd hessian;
  for (;;) {
    free.places.clear();
    for (std::size_t i = 0; i < size; ++i) {
      if (!held[i]) free.places.push_back(index(i));
    }
    const Eigen::VectorXd start = p;
    p = search_maximum(population, free, start, options.most_iterations);
    bool at_bound = false;
    for (const std::size_t w : PopulationLayout::widths) {
      if (held[w] || p[index(w)] > std::log(options.smallest_width)) continue;
      hold(held, p, w, std::log(options.smallest_width));
      at_bound = true;
      result.remarks.push_back(fmt::format("{} is held at its lower bound {}: the errors alone explain the spread.",
                                           parameter_names(population)[w], options.smallest_width));
    }
    if (at_bound) continue;
    if (polish_maximum(population, free, p, hessian) &&
        (!options.restricted_widths || correct_widths(population, free, hessian, p)))
      break;
    throw NoResultError(fmt::format(
        "the standardisation of {} supernovae did not converge; hold alpha, beta or gamma at a value.", data.size()));
  }

  hessian = free.pick(population_likelihood(population.data, population.layout(), p, Derivatives::second).hessian);
  const std::vector<std::string> names = parameter_names(population);
  const Eigen::MatrixXd inverse = 2.0 * hessian.llt().solve(Eigen::MatrixXd::Identity(hessian.rows(), hessian.cols()));
  result.covariance = Eigen::MatrixXd::Zero(index(size), index(size));
  result.covariance(free.places, free.places) = inverse;
  for (std::size_t i = 0; i < size; ++i) {
    const bool logarithmic = is_width(i);
    const double value = logarithmic ? std::exp(p[index(i)]) : p[index(i)];
    if (logarithmic) {
      result.covariance.row(index(i)) *= value;
      result.covariance.col(index(i)) *= value;
    }
    result.parameters.push_back({names[i], value, 0.0, held[i]});
  }
  for (std::size_t i = 0; i < size; ++i) result.parameters[i].error = std::sqrt(result.covariance(index(i), index(i)));
  const PopulationLikelihood best = population_likelihood(population.data, population.layout(), p, Derivatives::none);
  result.minus_two_ln_likelihood = best.value;
  result.chi2 = best.chi2;
  result.magnitudes = standardise(data, coefficients(result), options.host_mass);
  shrink_magnitudes(data, population, p, result.magnitudes);
  return result;
}

}  // namespace thirdrung
