#include "standardisation/standardisation.h"

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <stdexcept>

namespace thirdrung {

namespace {

const StandardisationParameter& find(const StandardisationResult& result, const std::string& name) {
  const auto it = std::find_if(result.parameters.begin(), result.parameters.end(),
                               [&name](const StandardisationParameter& p) { return p.name == name; });
  if (it == result.parameters.end()) throw std::logic_error("no standardisation parameter is called " + name);
  return *it;
}

}  // namespace

double StandardisationResult::value(const std::string& name) const {
  return find(*this, name).value;
}
double StandardisationResult::error(const std::string& name) const {
  return find(*this, name).error;
}

StandardisationCoefficients coefficients(const StandardisationResult& result) {
  return {result.value("alpha"),     result.value("beta"),      result.value("gamma"),
          result.value("sigma_int"), result.value("intercept"), result.lost_variance};
}

std::vector<StandardisedMagnitude> standardise(std::span<const StandardisationDatum> data,
                                               const StandardisationCoefficients& k, const HostMassOptions& host_mass) {
  std::vector<StandardisedMagnitude> result;
  result.reserve(data.size());
  const Eigen::Vector3d a(1.0, k.alpha, -k.beta);
  for (const StandardisationDatum& d : data) {
    StandardisedMagnitude m;
    m.name = d.name;
    m.mass_probability = host_mass_probability(d.host_log_mass, d.host_log_mass_error, host_mass);
    m.magnitude = d.m_b + k.alpha * (d.s - 1.0) - k.beta * d.c + k.gamma * (m.mass_probability - 0.5);
    m.fit_variance = a.dot(d.covariance * a);
    m.intrinsic_variance =
        k.sigma_int * k.sigma_int + k.gamma * k.gamma * m.mass_probability * (1.0 - m.mass_probability);
    m.shrunk_magnitude = m.magnitude;
    m.shrunk_variance = m.variance();
    result.push_back(std::move(m));
  }
  return result;
}

Eigen::MatrixXd coefficient_shifts(std::span<const StandardisationDatum> data, const StandardisationResult& result,
                                   const HostMassOptions& host_mass) {
  const char* const names[] = {"alpha", "beta", "gamma"};
  std::array<Eigen::Index, 3> index{};
  for (std::size_t k = 0; k < 3; ++k) {
    const auto it = std::find_if(result.parameters.begin(), result.parameters.end(),
                                 [&](const StandardisationParameter& p) { return p.name == names[k]; });
    if (it == result.parameters.end()) throw std::logic_error("a standardisation without alpha, beta and gamma");
    index[k] = it - result.parameters.begin();
  }
  Eigen::Matrix3d sigma;
  for (Eigen::Index i = 0; i < 3; ++i) {
    for (Eigen::Index j = 0; j < 3; ++j) {
      sigma(i, j) = result.covariance(index[static_cast<std::size_t>(i)], index[static_cast<std::size_t>(j)]);
    }
  }
  const auto n = static_cast<Eigen::Index>(data.size());
  Eigen::MatrixXd jacobian(n, 3);
  for (Eigen::Index i = 0; i < n; ++i) {
    const StandardisationDatum& d = data[static_cast<std::size_t>(i)];
    const double p = host_mass_probability(d.host_log_mass, d.host_log_mass_error, host_mass);
    jacobian.row(i) << d.s - 1.0, -d.c, p - 0.5;
  }
  const Eigen::SelfAdjointEigenSolver<Eigen::Matrix3d> principal(sigma);
  const Eigen::Vector3d size = principal.eigenvalues().cwiseMax(0.0).cwiseSqrt();
  return jacobian * principal.eigenvectors() * size.asDiagonal();
}

}  // namespace thirdrung
