#include <Eigen/Dense>
#include <catch2/catch.hpp>
#include <cmath>
#include <random>

#include "training/normal_equations.h"
#include "training/penalties.h"
#include "training/small_training.h"
#include "training/spread_terms.h"

// Every check here is against finite differences or against the same algebra written out in full matrices; the
// tolerances are those of double precision and of the differences' step.

namespace thirdrung::testing {
namespace {

/// Three supernovae on the small bases, some way off the truth so that residuals and gradients do not vanish.
struct TinyProblem {
  SimulatedTraining simulated;
  PreparedTraining set;
  SpectralTemplate model;
  UnknownsPrior prior;

  TinyProblem() {
    SimulatedTrainingOptions how;
    how.supernovae = 9;
    how.cadence = 8;
    simulated = simulated_training(how);
    simulated.candidates = {simulated.candidates[0], simulated.candidates[5], simulated.candidates[8]};
    simulated.truths = {simulated.truths[0], simulated.truths[5], simulated.truths[8]};
    set = prepared(simulated);
    model = simulated.truth;
    for (SupernovaUnknowns& at : set.unknowns) at = {at.t_0 + 0.3, at.m_b + 0.02, at.s + 0.02, at.c - 0.03};
    for (Eigen::VectorXd& weight : set.weights) weight(2) = 0.4;
  }
};

Eigen::VectorXd random_vector(Eigen::Index size, unsigned seed) {
  std::mt19937_64 generator(seed);
  std::normal_distribution<double> normal;
  Eigen::VectorXd out(size);
  for (Eigen::Index i = 0; i < size; ++i) out(i) = normal(generator);
  return out;
}

SpectralTemplate moved_along(const SpectralTemplate& model, const Eigen::VectorXd& direction, double step) {
  return moved_template(model, step * direction);
}

Eigen::MatrixXd dense_covariance(const TrainingSupernova& sn, const SupernovaNoise& noise,
                                 const Eigen::VectorXd& flux) {
  Eigen::MatrixXd out = noise.variance.asDiagonal();
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    Eigen::VectorXd common = Eigen::VectorXd::Zero(flux.size());
    for (std::size_t e = sn.bands[b].begin; e < sn.bands[b].end; ++e) {
      common(static_cast<Eigen::Index>(e)) = noise.colour_scatter[b] * flux(static_cast<Eigen::Index>(e));
    }
    out += common * common.transpose();
  }
  return out;
}

/// Gradient of every epoch in all coefficients, as a full matrix.
Eigen::MatrixXd dense_gradients(const CoefficientLayout& layout, const TrainingSupernova& sn,
                                const LinearisedSupernova& line) {
  Eigen::MatrixXd out = Eigen::MatrixXd::Zero(static_cast<Eigen::Index>(sn.epochs.size()), layout.size());
  for (const TrainingBand& band : sn.bands) {
    for (std::size_t e = band.begin; e < band.end; ++e) {
      Eigen::VectorXd row = Eigen::VectorXd::Zero(layout.size());
      add_gradient(layout, band, line.gradients[e], 1.0, row);
      out.row(static_cast<Eigen::Index>(e)) = row.transpose();
    }
  }
  return out;
}

}  // namespace

TEST_CASE("model fluxes have the slopes they are given, in unknowns and in coefficients") {
  const TinyProblem tiny;
  const CoefficientLayout layout(tiny.model);
  for (std::size_t k = 0; k < tiny.set.supernovae.size(); ++k) {
    const TrainingSupernova& sn = tiny.set.supernovae[k];
    const SupernovaUnknowns at = tiny.set.unknowns[k];
    const LinearisedSupernova line = linearise(tiny.model, sn, at, tiny.set.weights[k]);
    const double scale = line.model.flux.cwiseAbs().maxCoeff();
    const double step = 1e-5;
    const std::array<Eigen::Vector4d, 4> moves = {Eigen::Vector4d::UnitX(), Eigen::Vector4d::UnitY(),
                                                  Eigen::Vector4d::UnitZ(), Eigen::Vector4d::UnitW()};
    for (Eigen::Index i = 0; i < 4; ++i) {
      const Eigen::Vector4d d = step * moves[static_cast<std::size_t>(i)];
      const SupernovaUnknowns up{at.t_0 + d(0), at.m_b + d(1), at.s + d(2), at.c + d(3)};
      const SupernovaUnknowns down{at.t_0 - d(0), at.m_b - d(1), at.s - d(2), at.c - d(3)};
      const Eigen::VectorXd slope =
          (evaluate_supernova(tiny.model, sn, up).flux - evaluate_supernova(tiny.model, sn, down).flux) / (2 * step);
      // Dates near 58000 d keep eleven digits of a step of 1e-5 d.
      CHECK((slope - line.model.by_unknowns.col(i)).cwiseAbs().maxCoeff() < 1e-5 * scale);
    }
    const Eigen::MatrixXd gradients = dense_gradients(layout, sn, line);
    for (unsigned seed = 1; seed <= 3; ++seed) {
      const Eigen::VectorXd direction = random_vector(layout.size(), seed);
      const Eigen::VectorXd slope = (evaluate_supernova(moved_along(tiny.model, direction, step), sn, at).flux -
                                     evaluate_supernova(moved_along(tiny.model, direction, -step), sn, at).flux) /
                                    (2 * step);
      CHECK((slope - gradients * direction).cwiseAbs().maxCoeff() < 1e-7 * scale);
    }
  }
}

TEST_CASE("the inverse and determinant of the noise agree with full matrices") {
  const TinyProblem tiny;
  for (std::size_t k = 0; k < tiny.set.supernovae.size(); ++k) {
    const TrainingSupernova& sn = tiny.set.supernovae[k];
    const Eigen::VectorXd flux = evaluate_supernova(tiny.model, sn, tiny.set.unknowns[k]).flux;
    const SupernovaNoise noise = supernova_noise(tiny.model, sn, tiny.set.unknowns[k], flux, tiny.set.weights[k]);
    const Eigen::MatrixXd covariance = dense_covariance(sn, noise, flux);
    Eigen::MatrixXd rows(flux.size(), 2);
    rows << random_vector(flux.size(), 4), random_vector(flux.size(), 5);
    const Eigen::LLT<Eigen::MatrixXd> factor(covariance);
    const Eigen::MatrixXd expected = factor.solve(rows);
    CHECK((apply_inverse(sn, noise, flux, rows) - expected).norm() < 1e-10 * expected.norm());
    const double log_det = 2 * factor.matrixLLT().diagonal().array().log().sum();
    CHECK(log_determinant(sn, noise, flux) == Approx(log_det).epsilon(1e-12));
  }
}

TEST_CASE("eliminating the supernovae's unknowns gives the step of the full system") {
  const TinyProblem tiny;
  const CoefficientLayout layout(tiny.model);
  const auto n = static_cast<Eigen::Index>(layout.size());
  const auto count = static_cast<Eigen::Index>(tiny.set.supernovae.size());
  std::vector<EliminatedSupernova> eliminated;
  NormalEquations reduced = eliminate_supernovae(tiny.model, tiny.set.supernovae, tiny.set.unknowns, tiny.set.weights,
                                                 tiny.prior, 1, eliminated);
  // The full system over coefficients and unknowns together.
  Eigen::MatrixXd full = Eigen::MatrixXd::Zero(n + 4 * count, n + 4 * count);
  Eigen::VectorXd gradient = Eigen::VectorXd::Zero(n + 4 * count);
  double objective_slope = 0;
  const Eigen::VectorXd direction = random_vector(n, 7);
  for (Eigen::Index k = 0; k < count; ++k) {
    const auto i = static_cast<std::size_t>(k);
    const TrainingSupernova& sn = tiny.set.supernovae[i];
    const SupernovaUnknowns at = tiny.set.unknowns[i];
    const LinearisedSupernova line = linearise(tiny.model, sn, at, tiny.set.weights[i]);
    Eigen::MatrixXd jacobian = Eigen::MatrixXd::Zero(line.residual.size(), n + 4 * count);
    jacobian.leftCols(n) = dense_gradients(layout, sn, line);
    jacobian.middleCols(n + 4 * k, 4) = line.model.by_unknowns;
    const Eigen::LLT<Eigen::MatrixXd> noise(dense_covariance(sn, line.noise, line.model.flux));
    full += jacobian.transpose() * noise.solve(jacobian);
    gradient += jacobian.transpose() * noise.solve(line.residual);
    full(n + 4 * k + 2, n + 4 * k + 2) += 1 / (tiny.prior.s_width * tiny.prior.s_width);
    full(n + 4 * k + 3, n + 4 * k + 3) += 1 / (tiny.prior.c_width * tiny.prior.c_width);
    gradient(n + 4 * k + 2) += (tiny.prior.s_mean - at.s) / (tiny.prior.s_width * tiny.prior.s_width);
    gradient(n + 4 * k + 3) += (tiny.prior.c_mean - at.c) / (tiny.prior.c_width * tiny.prior.c_width);
    // Slope of the objective with the noise held, by differences.
    const auto half = [&](double step) {
      const SpectralTemplate model = moved_along(tiny.model, direction, step);
      Eigen::VectorXd residual = line.residual + line.model.flux - evaluate_supernova(model, sn, at).flux;
      return half_chi2(sn, line.noise, line.model.flux, residual, at, tiny.prior);
    };
    objective_slope += (half(1e-5) - half(-1e-5)) / 2e-5;
  }
  CHECK(gradient.head(n).dot(direction) == Approx(-objective_slope).epsilon(1e-6));
  // What the freedom of the unknowns costs has a gradient, and no curvature in the system (its own test is below).
  gradient.head(n) -= reduced.spread;
  CHECK(reduced.spread.norm() > 0);

  // Smoothing makes both systems definite; the step must be the same.
  NormalEquations smooth(layout.size());
  add_smoothness(tiny.model, {}, smooth);
  reduced.add(smooth);
  full.topLeftCorner(n, n) += Eigen::MatrixXd(smooth.hessian.selfadjointView<Eigen::Lower>());
  gradient.head(n) += smooth.gradient;
  // The edges of the grid are held by nothing: a weak pull to where they are.
  full.topLeftCorner(n, n).diagonal().array() += 1e-3;
  reduced.hessian.diagonal().array() += 1e-3;
  const Eigen::VectorXd expected = Eigen::LDLT<Eigen::MatrixXd>(full).solve(gradient);
  const Eigen::LLT<Eigen::MatrixXd> factor(reduced.hessian.selfadjointView<Eigen::Lower>());
  const Eigen::VectorXd step = factor.solve(reduced.gradient);
  CHECK((step - expected.head(n)).norm() < 1e-6 * expected.head(n).norm());
  for (Eigen::Index k = 0; k < count; ++k) {
    const Eigen::Vector4d local = eliminated[static_cast<std::size_t>(k)].step(step);
    CHECK((local - expected.segment(n + 4 * k, 4)).norm() < 1e-6 * expected.segment(n + 4 * k, 4).norm());
  }
}

// Along a change of Gamma and K with everything else held, shares of the wavelengths in a band included, L changes by
// the means of dGamma and dK over each band.
TEST_CASE("the cost of the unknowns' freedom has the slope of half ln det of their precision") {
  const TinyProblem tiny;
  const CoefficientLayout layout(tiny.model);
  for (std::size_t k = 0; k < tiny.set.supernovae.size(); ++k) {
    const TrainingSupernova& sn = tiny.set.supernovae[k];
    // At s = 1 and c = 0 fluxes do not depend on Gamma and K, so that nothing needs to be held by hand.
    SupernovaUnknowns at = tiny.set.unknowns[k];
    at.s = 1;
    at.c = 0;
    const LinearisedSupernova line = linearise(tiny.model, sn, at, tiny.set.weights[k]);
    const Eigen::LLT<Eigen::MatrixXd> noise(dense_covariance(sn, line.noise, line.model.flux));
    const auto precision = [&](const Locals& by_unknowns) {
      Eigen::Matrix4d a = by_unknowns.transpose() * noise.solve(by_unknowns);
      a(2, 2) += 1 / (tiny.prior.s_width * tiny.prior.s_width);
      a(3, 3) += 1 / (tiny.prior.c_width * tiny.prior.c_width);
      return a;
    };
    Eigen::VectorXd slope = Eigen::VectorXd::Zero(layout.size());
    add_spread_slope(layout, sn, line, precision(line.model.by_unknowns).inverse(), slope);
    CHECK(slope.head(layout.gamma_start()).norm() == 0);
    Eigen::VectorXd direction = random_vector(layout.size(), 3);
    direction.head(layout.gamma_start()).setZero();
    const auto half_log_determinant = [&](double step) {
      const SpectralTemplate model = moved_along(tiny.model, direction, step);
      return 0.5 * std::log(precision(evaluate_supernova(model, sn, at).by_unknowns).determinant());
    };
    const double expected = (half_log_determinant(1e-4) - half_log_determinant(-1e-4)) / 2e-4;
    CHECK(slope.dot(direction) == Approx(expected).epsilon(1e-5));
  }
}

TEST_CASE("smoothing and gauge have the slopes and curvatures they are given") {
  TinyProblem tiny;
  const CoefficientLayout layout(tiny.model);
  // Off the gauge, so that its conditions are not zero; a little, so that they stay nearly linear.
  tiny.model = moved_along(tiny.model, random_vector(layout.size(), 1), 0.01);
  const Smoothness smoothness;
  NormalEquations smooth(layout.size());
  const double half = add_smoothness(tiny.model, smoothness, smooth);
  CHECK(half == Approx(half_smoothness(tiny.model, smoothness)).epsilon(1e-12));
  NormalEquations gauge(layout.size());
  const double error = 1e-2;
  CHECK(add_gauge(tiny.model, error, gauge) == Approx(half_gauge(tiny.model, error)).epsilon(1e-12));
  for (unsigned seed = 11; seed <= 14; ++seed) {
    const Eigen::VectorXd direction = random_vector(layout.size(), seed);
    const auto slope = [&](const auto& value, double step) {
      return (value(moved_along(tiny.model, direction, step)) - value(moved_along(tiny.model, direction, -step))) /
             (2 * step);
    };
    const auto half_smooth = [&](const SpectralTemplate& model) { return half_smoothness(model, smoothness); };
    const auto half_gauge_of = [&](const SpectralTemplate& model) { return half_gauge(model, error); };
    CHECK(smooth.gradient.dot(direction) == Approx(-slope(half_smooth, 1e-3)).epsilon(1e-7));
    CHECK(gauge.gradient.dot(direction) == Approx(-slope(half_gauge_of, 1e-5)).epsilon(1e-5));
    // The smoothing is quadratic: its curvature is exact.
    const double curvature = direction.dot(smooth.hessian.selfadjointView<Eigen::Lower>() * direction);
    const double expected = half_smooth(moved_along(tiny.model, direction, 1.0)) - 2 * half_smooth(tiny.model) +
                            half_smooth(moved_along(tiny.model, direction, -1.0));
    CHECK(curvature == Approx(expected).epsilon(1e-9));
  }
}

}  // namespace thirdrung::testing
