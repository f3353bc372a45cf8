#include "hubbleflow/covariance_model.h"

#include <fmt/format.h>

#include <Eigen/Eigenvalues>
#include <cmath>
#include <stdexcept>

#include "base/constants.h"
#include "base/error.h"

namespace thirdrung {

namespace {

Eigen::MatrixXd shift_matrix(const CovarianceModel& model) {
  Eigen::MatrixXd shifts(static_cast<Eigen::Index>(model.supernovae.size()),
                         static_cast<Eigen::Index>(model.systematics.size()));
  for (std::size_t k = 0; k < model.systematics.size(); ++k)
    shifts.col(static_cast<Eigen::Index>(k)) = model.systematics[k].shift;
  return shifts;
}

void check_length(const std::string& name, Eigen::Index rows, Eigen::Index columns, std::size_t count, bool finite) {
  const auto n = static_cast<Eigen::Index>(count);
  const Place place{fmt::format("uncertainty '{}'", name), std::nullopt, ""};
  if (rows != n || columns != n) {
    throw InputError(place, fmt::format("it has size {} by {} for {} supernovae", rows, columns, n),
                     "give one entry a supernova");
  }
  if (!finite) throw InputError(place, "it has a value that is not a number", "check the inputs it is made from");
}

}  // namespace

Eigen::MatrixXd CovarianceModel::statistical() const {
  const auto n = static_cast<Eigen::Index>(supernovae.size());
  Eigen::MatrixXd sum = Eigen::MatrixXd::Zero(n, n);
  for (const CovariancePart& part : parts) {
    if (part.diagonal.size() > 0) sum.diagonal() += part.diagonal;
    if (part.matrix.size() > 0) sum += 0.5 * (part.matrix + part.matrix.transpose());
  }
  return sum;
}

Eigen::MatrixXd CovarianceModel::systematic() const {
  const auto n = static_cast<Eigen::Index>(supernovae.size());
  if (systematics.empty()) return Eigen::MatrixXd::Zero(n, n);
  const Eigen::MatrixXd shifts = shift_matrix(*this);
  Eigen::MatrixXd sum = correlation.size() > 0 ? Eigen::MatrixXd(shifts * correlation * shifts.transpose())
                                               : Eigen::MatrixXd(shifts * shifts.transpose());
  sum.triangularView<Eigen::StrictlyUpper>() = sum.transpose();
  return sum;
}

Eigen::MatrixXd CovarianceModel::total() const {
  return statistical() + systematic();
}

Eigen::MatrixXd CovarianceModel::weighting() const {
  CovarianceModel weighing = *this;
  std::erase_if(weighing.parts, [](const CovariancePart& part) { return !part.weighs; });
  for (SystematicShift& shift : weighing.systematics) {
    if (!shift.weighs) shift.shift.setZero();
  }
  return weighing.total();
}

void check_covariance_model(const CovarianceModel& model) {
  const std::size_t n = model.supernovae.size();
  for (const CovariancePart& part : model.parts) {
    const bool diagonal = part.diagonal.size() > 0;
    check_length(part.name, diagonal ? part.diagonal.size() : part.matrix.rows(),
                 diagonal ? part.diagonal.size() : part.matrix.cols(), n,
                 diagonal ? part.diagonal.allFinite() : part.matrix.allFinite());
  }
  for (const SystematicShift& s : model.systematics)
    check_length(s.name, s.shift.size(), s.shift.size(), n, s.shift.allFinite());
  if (model.correlation.size() == 0) return;
  const auto k = static_cast<Eigen::Index>(model.systematics.size());
  const Eigen::MatrixXd& rho = model.correlation;
  const bool sound =
      rho.rows() == k && rho.cols() == k && rho.allFinite() && (rho.diagonal().array() - 1.0).abs().maxCoeff() < 1e-9 &&
      (rho - rho.transpose()).cwiseAbs().maxCoeff() < 1e-9 &&
      Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(rho, Eigen::EigenvaluesOnly).eigenvalues()[0] > -1e-9;
  if (!sound) {
    throw InputError(
        {"correlation of the systematics", std::nullopt, ""}, "it is not a correlation matrix",
        fmt::format("give {0} by {0} numbers, symmetric, ones on the diagonal, without negative eigenvalues", k));
  }
}

CovarianceModel cut(const CovarianceModel& model, const std::vector<bool>& members) {
  const std::vector<Eigen::Index> places = places_of(members);
  CovarianceModel result;
  for (const Eigen::Index i : places) result.supernovae.push_back(model.supernovae[static_cast<std::size_t>(i)]);
  for (const CovariancePart& part : model.parts) {
    CovariancePart kept{part.name, part.kind, {}, {}, part.weighs};
    if (part.diagonal.size() > 0) kept.diagonal = part.diagonal(places);
    if (part.matrix.size() > 0) kept.matrix = part.matrix(places, places);
    result.parts.push_back(std::move(kept));
  }
  for (const SystematicShift& s : model.systematics) {
    result.systematics.push_back({s.name, s.kind, s.size, s.unit, s.shift(places), s.weighs});
  }
  result.correlation = model.correlation;
  return result;
}

CovariancePart constant_part(std::string name, std::size_t supernovae, double sigma) {
  return {std::move(name),
          "statistical",
          Eigen::VectorXd::Constant(static_cast<Eigen::Index>(supernovae), sigma * sigma),
          {}};
}

CovariancePart velocity_scatter_part(std::span<const FlowSupernova> supernovae, const Expansion& expansion,
                                     double sigma_v, std::span<const double> z_errors) {
  CovariancePart part{
      "velocity scatter", "statistical", Eigen::VectorXd(static_cast<Eigen::Index>(supernovae.size())), {}};
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    const double z = supernovae[i].z_flow;
    const double velocity = 5.0 * velocity_response(z, expansion) * sigma_v / constants::speed_of_light_km_s;
    double redshift = 0.0;
    if (!z_errors.empty() && std::isfinite(z_errors[i]))
      redshift = 5.0 * log_expansion_slope(z, expansion) * z_errors[i];
    part.diagonal[static_cast<Eigen::Index>(i)] = velocity * velocity + redshift * redshift;
  }
  return part;
}

CovarianceModel statistical_model(std::span<const FlowSupernova> supernovae,
                                  std::span<const StandardisedMagnitude> magnitudes, const Expansion& expansion,
                                  double sigma_v, std::span<const double> z_errors) {
  if (magnitudes.size() != supernovae.size()) throw std::logic_error("magnitudes and supernovae differ in number");
  const auto n = static_cast<Eigen::Index>(supernovae.size());
  CovarianceModel model;
  CovariancePart fit{"light-curve fit", "statistical", Eigen::VectorXd(n), {}};
  CovariancePart intrinsic{"intrinsic scatter", "statistical", Eigen::VectorXd(n), {}};
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    if (magnitudes[i].name != supernovae[i].name)
      throw std::logic_error("magnitudes in another order than the supernovae");
    model.supernovae.push_back(supernovae[i].name);
    fit.diagonal[static_cast<Eigen::Index>(i)] = magnitudes[i].fit_variance;
    intrinsic.diagonal[static_cast<Eigen::Index>(i)] = magnitudes[i].intrinsic_variance;
  }
  model.parts = {fit, intrinsic, velocity_scatter_part(supernovae, expansion, sigma_v, z_errors)};
  return model;
}

void add_coefficient_shifts(CovarianceModel& model, const Eigen::MatrixXd& shifts) {
  for (Eigen::Index k = 0; k < shifts.cols(); ++k) {
    if (shifts.col(k).cwiseAbs().maxCoeff() == 0.0) continue;  // a coefficient that was held
    model.systematics.push_back(
        {fmt::format("standardisation coefficients {}", k + 1), "standardisation", 1.0, "sigma", shifts.col(k), false});
  }
}

Eigen::VectorXd effective_shift(std::span<const FlowSupernova> baseline, const FlowOptions& flow,
                                std::span<const FlowSupernova> changed, const FlowOptions& changed_flow) {
  return -5.0 * (single_intercepts(changed, changed_flow) - single_intercepts(baseline, flow));
}

Eigen::VectorXd expansion_shift(std::span<const FlowSupernova> supernovae, const FlowOptions& flow, double q0_error,
                                double j0_error) {
  FlowOptions changed = flow;
  changed.expansion.q0 += q0_error;
  changed.expansion.j0 += j0_error;
  changed.expansion.omega_m += q0_error / 1.5;
  return effective_shift(supernovae, flow, supernovae, changed);
}

Eigen::VectorXd redshift_shift(std::span<const FlowSupernova> supernovae, const FlowOptions& flow, double dz) {
  std::vector<FlowSupernova> changed(supernovae.begin(), supernovae.end());
  for (FlowSupernova& s : changed) {
    const double factor = std::isfinite(s.z_helio) ? 1.0 + dz / (1.0 + s.z_helio) : 1.0 + dz / (1.0 + s.z_flow);
    s.z_flow = (1.0 + s.z_flow) * factor - 1.0;
    s.z_helio += dz;
  }
  return effective_shift(supernovae, flow, changed, flow);
}

}  // namespace thirdrung
