#include "standardisation/maximise.h"

#include <ceres/ceres.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

namespace thirdrung {

namespace {

Eigen::Index index(std::size_t i) {
  return static_cast<Eigen::Index>(i);
}

/// -2 ln L for the minimiser, in coordinates x with parameters = start + scale x.
class ScaledLikelihood : public ceres::FirstOrderFunction {
 public:
  ScaledLikelihood(const PopulationData& data, const FreeParameters& free, Eigen::VectorXd start, Eigen::MatrixXd scale)
      : data_(data), free_(free), start_(std::move(start)), scale_(std::move(scale)) {}

  Eigen::VectorXd parameters(const double* x) const {
    Eigen::VectorXd full = start_;
    full(free_.places) += scale_ * Eigen::Map<const Eigen::VectorXd>(x, NumParameters());
    return full;
  }
  bool Evaluate(const double* x, double* cost, double* gradient) const override {
    const PopulationLikelihood l = population_likelihood(data_.data, data_.layout(), parameters(x),
                                                         gradient ? Derivatives::first : Derivatives::none);
    *cost = l.value;
    if (gradient) {
      Eigen::Map<Eigen::VectorXd>(gradient, NumParameters()) = scale_.transpose() * free_.pick(l.gradient);
    }
    return std::isfinite(l.value);
  }
  int NumParameters() const override { return static_cast<int>(free_.places.size()); }

 private:
  const PopulationData& data_;
  const FreeParameters& free_;
  Eigen::VectorXd start_;
  Eigen::MatrixXd scale_;
};

/// ln det of the expected curvature of the free parameters that are not widths.
double location_information(const PopulationData& data, const FreeParameters& location,
                            const Eigen::VectorXd& parameters) {
  const Eigen::MatrixXd fisher =
      location.pick(population_likelihood(data.data, data.layout(), parameters, Derivatives::second).fisher);
  return 2.0 * Eigen::MatrixXd(fisher.llt().matrixL()).diagonal().array().log().sum();
}

}  // namespace

Eigen::VectorXd search_maximum(const PopulationData& data, const FreeParameters& free, const Eigen::VectorXd& start,
                               int most_iterations) {
  const Eigen::MatrixXd fisher =
      free.pick(population_likelihood(data.data, data.layout(), start, Derivatives::second).fisher);
  // Scale = L^-T with fisher = L L^T; a little on the diagonal in case a direction is hardly determined at the start.
  const Eigen::VectorXd ridge = 1e-10 * fisher.diagonal();
  const Eigen::LLT<Eigen::MatrixXd> cholesky(fisher + Eigen::MatrixXd(ridge.asDiagonal()));
  const Eigen::MatrixXd scale = cholesky.matrixU().solve(Eigen::MatrixXd::Identity(fisher.rows(), fisher.cols()));
  auto* function = new ScaledLikelihood(data, free, start, scale);  // owned by the problem
  const ceres::GradientProblem problem(function);
  ceres::GradientProblemSolver::Options options;
  options.line_search_direction_type = ceres::BFGS;
  options.max_num_iterations = most_iterations;
  options.function_tolerance = 1e-14;
  options.gradient_tolerance = 1e-6;
  options.logging_type = ceres::SILENT;
  ceres::GradientProblemSolver::Summary summary;
  std::vector<double> x(free.places.size(), 0.0);
  ceres::Solve(options, problem, x.data(), &summary);
  return function->parameters(x.data());
}

bool polish_maximum(const PopulationData& data, const FreeParameters& free, Eigen::VectorXd& parameters,
                    Eigen::MatrixXd& hessian) {
  for (int i = 0; i < 50; ++i) {
    const PopulationLikelihood l = population_likelihood(data.data, data.layout(), parameters, Derivatives::second);
    hessian = free.pick(l.hessian);
    const Eigen::LLT<Eigen::MatrixXd> cholesky(hessian);
    if (cholesky.info() != Eigen::Success) return false;
    const Eigen::VectorXd step = cholesky.solve(free.pick(l.gradient));
    const double decrement = step.dot(free.pick(l.gradient));
    if (!std::isfinite(decrement)) return false;
    if (decrement < 1e-18 * static_cast<double>(data.data.size()) + 1e-16) return true;
    double fraction = 1.0;
    for (; fraction > 1e-4; fraction *= 0.5) {
      Eigen::VectorXd trial = parameters;
      trial(free.places) -= fraction * step;
      if (population_likelihood(data.data, data.layout(), trial, Derivatives::none).value <= l.value + 1e-9) {
        parameters = trial;
        break;
      }
    }
    if (fraction <= 1e-4) return decrement < 1e-10;
  }
  return false;
}

bool correct_widths(const PopulationData& data, const FreeParameters& free, const Eigen::MatrixXd& hessian,
                    Eigen::VectorXd& parameters) {
  FreeParameters location;
  FreeParameters width;
  for (const Eigen::Index place : free.places) {
    (is_width(static_cast<std::size_t>(place)) ? width : location).places.push_back(place);
  }
  if (width.places.empty()) return true;
  Eigen::VectorXd slope = Eigen::VectorXd::Zero(parameters.size());
  for (const Eigen::Index place : width.places) {
    constexpr double h = 1e-4;
    Eigen::VectorXd shifted = parameters;
    shifted[place] += h;
    const double up = location_information(data, location, shifted);
    shifted[place] -= 2.0 * h;
    slope[place] = (up - location_information(data, location, shifted)) / (2.0 * h);
  }
  const Eigen::VectorXd step = hessian.llt().solve(free.pick(slope));
  for (std::size_t k = 0; k < free.places.size(); ++k) {
    const bool corrected = is_width(static_cast<std::size_t>(free.places[k]));
    // A step of more than a half in the logarithm means a width that the data hardly show: the first order does not
    // hold there.
    if (corrected) parameters[free.places[k]] -= std::clamp(step[index(k)], -0.5, 0.5);
  }
  Eigen::MatrixXd unused;
  return polish_maximum(data, location, parameters, unused);
}

}  // namespace thirdrung
