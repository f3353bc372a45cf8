#include "lightcurve/solve.h"

#include <ceres/tiny_solver.h>

#include <Eigen/Dense>
#include <array>
#include <cmath>

namespace thirdrung {

namespace {

constexpr int most_iterations = 60;
constexpr double settled = 1e-4;  // Of an error.

/// One bounded parameter as a function of a free one.
struct Bounded {
  double middle = 0;
  double half = 1;

  static Bounded between(double low, double high) { return {0.5 * (low + high), 0.5 * (high - low)}; }
  double value(double y) const { return middle + half * std::sin(y); }
  double slope(double y) const { return half * std::cos(y); }
  /// Kept a little off the bound, where the slope vanishes and no step could leave it.
  double free(double x) const { return std::asin(std::clamp((x - middle) / half, -0.999, 0.999)); }
};

/// Whitened residuals as TinySolver asks for them, at a fixed C.
class Residuals {
 public:
  using Scalar = double;
  enum { NUM_RESIDUALS = Eigen::Dynamic, NUM_PARAMETERS = 4 };

  Residuals(const Problem& problem, const Solution& solution)
      : problem_(problem),
        solution_(solution),
        t_0_(Bounded::between(problem.window.first, problem.window.last)),
        s_(Bounded::between(problem.options.s_min, problem.options.s_max)),
        c_(Bounded::between(problem.options.c_min, problem.options.c_max)) {
    data_.resize(static_cast<Eigen::Index>(solution.selection.size()));
    for (Eigen::Index i = 0; i < data_.size(); ++i) {
      data_[i] = problem.observed.observations[solution.selection[static_cast<std::size_t>(i)]].flux;
    }
  }

  void set_noise(const Noise& noise) { noise_ = &noise; }
  const Eigen::VectorXd& data() const { return data_; }

  Eigen::Vector4d free(const Parameters& at) const { return {t_0_.free(at[0]), at[1], s_.free(at[2]), c_.free(at[3])}; }
  Parameters bounded(const double* y) const { return {t_0_.value(y[0]), y[1], s_.value(y[2]), c_.value(y[3])}; }

  int NumResiduals() const {
    return static_cast<int>(data_.size()) + (solution_.s_prior ? 1 : 0) + (solution_.c_prior ? 1 : 0);
  }

  bool operator()(const double* y, double* residuals, double* jacobian) const {
    evaluate(y);
    const Eigen::Index n = data_.size();
    const Eigen::Index rows = NumResiduals();
    Eigen::Map<Eigen::VectorXd> r(residuals, rows);
    r.head(n) = data_ - flux_;
    noise_->whiten(r.head(n));
    Eigen::Index row = n;
    if (solution_.s_prior) r[row++] = (solution_.s_prior->mean - at_[2]) / solution_.s_prior->width;
    if (solution_.c_prior) r[row] = (solution_.c_prior->mean - at_[3]) / solution_.c_prior->width;
    if (jacobian) fill_jacobian(y, Eigen::Map<FluxSlopes>(jacobian, rows, 4));
    return true;
  }

 private:
  /// The solver asks for the residuals of a step and then, if it is taken, for its derivatives: one evaluation serves.
  void evaluate(const double* y) const {
    if (evaluated_ && std::equal(y, y + 4, last_.data())) return;
    std::copy(y, y + 4, last_.data());
    at_ = bounded(y);
    model_flux(problem_.observed, solution_.selection, at_, flux_, slopes_);
    evaluated_ = true;
  }

  void fill_jacobian(const double* y, Eigen::Map<FluxSlopes> j) const {
    const Eigen::Index n = data_.size();
    const std::array<double, 4> chain = {t_0_.slope(y[0]), 1.0, s_.slope(y[2]), c_.slope(y[3])};
    j.bottomRows(j.rows() - n).setZero();
    for (Eigen::Index k = 0; k < 4; ++k) {
      j.col(k).head(n) = -chain[static_cast<std::size_t>(k)] * slopes_.col(k);
      noise_->whiten(j.col(k).head(n));
    }
    Eigen::Index row = n;
    if (solution_.s_prior) j(row++, 2) = -chain[2] / solution_.s_prior->width;
    if (solution_.c_prior) j(row, 3) = -chain[3] / solution_.c_prior->width;
  }

  const Problem& problem_;
  const Solution& solution_;
  Bounded t_0_, s_, c_;
  Eigen::VectorXd data_;
  const Noise* noise_ = nullptr;
  mutable bool evaluated_ = false;
  mutable std::array<double, 4> last_{};
  mutable Parameters at_;
  mutable Eigen::VectorXd flux_;
  mutable FluxSlopes slopes_;
};

/// Inverse of J^T C^−1 J in the parameters themselves.
Eigen::Matrix4d covariance_of(const Solution& solution, const Noise& noise, FluxSlopes slopes) {
  for (Eigen::Index k = 0; k < 4; ++k) noise.whiten(slopes.col(k));
  Eigen::Matrix4d information = slopes.transpose() * slopes;
  if (solution.s_prior) information(2, 2) += std::pow(solution.s_prior->width, -2);
  if (solution.c_prior) information(3, 3) += std::pow(solution.c_prior->width, -2);
  // Scaled to a unit diagonal before the inversion: t_0 in days and c in magnitudes differ by orders.
  const Eigen::Vector4d scale = information.diagonal().cwiseMax(1e-300).cwiseSqrt().cwiseInverse();
  const Eigen::Matrix4d scaled = scale.asDiagonal() * information * scale.asDiagonal();
  const Eigen::Matrix4d inverse = scaled.ldlt().solve(Eigen::Matrix4d::Identity());
  const Eigen::Matrix4d out = scale.asDiagonal() * inverse * scale.asDiagonal();
  return 0.5 * (out + out.transpose());
}

/// Largest move in units of the errors.
double move_in_errors(const Parameters& from, const Parameters& to, const Eigen::Matrix4d& covariance) {
  double largest = 0;
  for (Eigen::Index k = 0; k < 4; ++k) {
    largest = std::max(largest, std::abs(to[k] - from[k]) / std::sqrt(std::max(covariance(k, k), 1e-300)));
  }
  return largest;
}

/// Part of a step to be taken: where the template fits badly, C and the answer may take turns for ever otherwise.
double relaxation(int iteration) {
  if (iteration <= 8) return 1.0;
  return iteration <= 20 ? 0.5 : 0.25;
}

/// Wide priors where the data alone cannot determine a parameter.
void hold_undetermined(const Problem& problem, Solution& solution) {
  solution.s_prior = problem.options.s_prior;
  solution.c_prior = problem.options.c_prior;
  std::size_t last = problem.observed.bands.size();
  for (const std::size_t i : solution.selection) {
    if (problem.observed.observations[i].band != last) ++solution.bands;
    last = problem.observed.observations[i].band;
  }
  const bool few = solution.selection.size() < 5;
  if (few && !solution.s_prior) solution.s_prior = Prior{1.0, 0.2};
  if ((few || solution.bands < 2) && !solution.c_prior) solution.c_prior = Prior{0.0, 0.3};
}

std::vector<double> cauchy_weights(const std::vector<double>& pulls, double scale) {
  std::vector<double> out;
  out.reserve(pulls.size());
  for (const double pull : pulls) out.push_back(1 / (1 + pull * pull / (scale * scale)));
  return out;
}

/// χ² of what the robust loss leaves in good standing, each epoch counted in full: weighted down, a template that fits
/// nowhere would look as good as one that fits.
void judge(const Problem& problem, const Eigen::VectorXd& data, Solution& out) {
  Selection kept;
  std::vector<double> model, left;
  for (std::size_t k = 0; k < out.selection.size(); ++k) {
    if (out.weights[k] < problem.options.mistrust_below) continue;
    const auto i = static_cast<Eigen::Index>(k);
    kept.push_back(out.selection[k]);
    model.push_back(out.flux[i]);
    left.push_back(data[i] - out.flux[i]);
  }
  const auto count = static_cast<Eigen::Index>(kept.size());
  const Eigen::VectorXd flux = Eigen::Map<const Eigen::VectorXd>(model.data(), count);
  Eigen::VectorXd r = Eigen::Map<const Eigen::VectorXd>(left.data(), count);
  Noise(problem.observed, kept, problem.model, out.at, flux, {}, problem.options.template_scatter).whiten(r);
  out.chi2 = r.squaredNorm();
  out.counted = kept.size();
}

}  // namespace

Solution solve(const Problem& problem, const Parameters& start, Selection selection) {
  const FitOptions& options = problem.options;
  Solution out;
  out.at = start;
  out.selection = std::move(selection);
  hold_undetermined(problem, out);
  Residuals residuals(problem, out);
  model_flux(problem.observed, out.selection, out.at, out.flux, out.slopes);
  Noise noise(problem.observed, out.selection, problem.model, out.at, out.flux, out.weights, options.template_scatter);
  ceres::TinySolver<Residuals> solver;
  solver.options.function_tolerance = 1e-9;
  solver.options.parameter_tolerance = 1e-12;
  solver.options.gradient_tolerance = 1e-12;
  while (out.iterations < most_iterations && !out.converged) {
    ++out.iterations;
    // Far from the answer C changes as much as the model does: no use in solving to the end each time.
    solver.options.max_num_iterations = out.iterations == 1 ? 12 : 6;
    residuals.set_noise(noise);
    Eigen::Vector4d y = residuals.free(out.at);
    solver.Solve(residuals, &y);
    const Parameters before = out.at;
    const Parameters proposed = residuals.bounded(y.data());
    out.at = before + relaxation(out.iterations) * (proposed - before);
    model_flux(problem.observed, out.selection, out.at, out.flux, out.slopes);
    if (options.robust) {
      out.weights = cauchy_weights(noise.own_pulls(residuals.data() - out.flux), options.robust_scale);
    }
    noise =
        Noise(problem.observed, out.selection, problem.model, out.at, out.flux, out.weights, options.template_scatter);
    out.covariance = covariance_of(out, noise, out.slopes);
    out.converged = move_in_errors(before, proposed, out.covariance) < settled;
  }
  if (out.weights.empty()) {
    Eigen::VectorXd r = residuals.data() - out.flux;
    noise.whiten(r);
    out.chi2 = r.squaredNorm();
    out.counted = out.selection.size();
  } else {
    judge(problem, residuals.data(), out);
  }
  out.converged = out.converged && std::isfinite(out.chi2) && out.covariance.allFinite();
  return out;
}

double minus_two_log_likelihood(const Problem& problem, const Solution& solution, const Selection& selection) {
  Eigen::VectorXd flux;
  FluxSlopes slopes;
  model_flux(problem.observed, selection, solution.at, flux, slopes);
  const Noise noise(problem.observed, selection, problem.model, solution.at, flux, {},
                    problem.options.template_scatter);
  Eigen::VectorXd r(flux.size());
  for (Eigen::Index i = 0; i < r.size(); ++i) {
    r[i] = problem.observed.observations[selection[static_cast<std::size_t>(i)]].flux - flux[i];
  }
  noise.whiten(r);
  return r.squaredNorm() + noise.log_determinant();
}

}  // namespace thirdrung
