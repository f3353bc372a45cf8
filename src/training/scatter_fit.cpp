#include "training/scatter_fit.h"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>

#include "base/parallel.h"

namespace thirdrung {

namespace {

/// Bilinear (or linear) weights of the nodes that one place falls between.
struct NodeWeights {
  std::array<int, 4> node{};
  std::array<double, 4> value{};
};

std::pair<int, double> between(const std::vector<double>& nodes, double x) {
  if (x <= nodes.front()) return {0, 0.0};
  if (x >= nodes.back()) return {static_cast<int>(nodes.size()) - 2, 1.0};
  const auto left = static_cast<int>(std::upper_bound(nodes.begin(), nodes.end(), x) - nodes.begin()) - 1;
  const auto l = static_cast<std::size_t>(left);
  return {left, (x - nodes[l]) / (nodes[l + 1] - nodes[l])};
}

/// One supernova with everything that does not change with ε and κ.
struct Frozen {
  Eigen::VectorXd flux, residual, measured_variance, robust;
  Locals by_unknowns;
  Eigen::Vector4d prior_inverse, prior_offset;
  std::vector<NodeWeights> epoch_nodes;
  std::vector<NodeWeights> band_nodes;
};

Frozen freeze(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
              const Eigen::VectorXd& robust, const UnknownsPrior& prior) {
  Frozen out;
  const SupernovaModel values = evaluate_supernova(model, sn, at);
  out.flux = values.flux;
  out.by_unknowns = values.by_unknowns;
  out.robust = robust;
  out.residual.resize(values.flux.size());
  out.measured_variance.resize(values.flux.size());
  out.epoch_nodes.resize(sn.epochs.size());
  const auto columns = static_cast<int>(model.scatter_wavelength.size());
  for (const TrainingBand& band : sn.bands) {
    const auto [col, across] = between(model.scatter_wavelength, band.weights.mean_wavelength);
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      out.residual(row) = sn.epochs[e].flux - values.flux(row);
      out.measured_variance(row) = sn.epochs[e].flux_error * sn.epochs[e].flux_error;
      const auto [line, along] = between(model.scatter_phase, (sn.epochs[e].mjd - at.t_0) / (1 + sn.z_helio));
      out.epoch_nodes[e] = {
          {line * columns + col, line * columns + col + 1, (line + 1) * columns + col, (line + 1) * columns + col + 1},
          {(1 - along) * (1 - across), (1 - along) * across, along * (1 - across), along * across}};
    }
    const auto [node, beyond] = between(model.colour_scatter_wavelength, band.weights.mean_wavelength);
    out.band_nodes.push_back({{node, node + 1, 0, 0}, {1 - beyond, beyond, 0, 0}});
  }
  out.prior_inverse << 0, 0, 1 / (prior.s_width * prior.s_width), 1 / (prior.c_width * prior.c_width);
  out.prior_offset << 0, 0, prior.s_mean - at.s, prior.c_mean - at.c;
  return out;
}

struct Score {
  double log_likelihood = 0;
  Eigen::VectorXd gradient;
  Eigen::MatrixXd information;
};

double at_nodes(const NodeWeights& w, const double* values) {
  double sum = 0;
  for (std::size_t k = 0; k < 4; ++k) {
    if (w.value[k] != 0.0) sum += w.value[k] * values[w.node[k]];
  }
  return sum;
}

/// Restricted log-likelihood of one supernova, its gradient in the node logarithms and an approximate information
/// matrix: with P the residual projector of the generalised least-squares fit, ∂L = ½ r'P ∂C P r − ½ tr(P ∂C).
Score score(const TrainingSupernova& sn, const Frozen& frozen, const Eigen::VectorXd& nodes, int epoch_nodes) {
  const auto size = nodes.size();
  Score out{0, Eigen::VectorXd::Zero(size), Eigen::MatrixXd::Zero(size, size)};
  const auto n = frozen.flux.size();
  SupernovaNoise noise;
  noise.variance.resize(n);
  Eigen::VectorXd epoch_part(n);
  for (Eigen::Index i = 0; i < n; ++i) {
    const double epsilon = std::exp(at_nodes(frozen.epoch_nodes[static_cast<std::size_t>(i)], nodes.data()));
    epoch_part(i) = epsilon * epsilon * frozen.flux(i) * frozen.flux(i) / frozen.robust(i);
    noise.variance(i) = frozen.measured_variance(i) / frozen.robust(i) + epoch_part(i);
  }
  for (const NodeWeights& w : frozen.band_nodes)
    noise.colour_scatter.push_back(std::exp(at_nodes(w, nodes.data() + epoch_nodes)));

  const Eigen::MatrixXd weighted = apply_inverse(sn, noise, frozen.flux, frozen.by_unknowns);
  Eigen::Matrix4d normal = frozen.by_unknowns.transpose() * weighted;
  normal.diagonal() += frozen.prior_inverse;
  const Eigen::LLT<Eigen::Matrix4d> factor(normal);
  const Eigen::VectorXd weighted_residual = apply_inverse(sn, noise, frozen.flux, frozen.residual).col(0);
  const Eigen::Vector4d rhs =
      frozen.by_unknowns.transpose() * weighted_residual + frozen.prior_inverse.cwiseProduct(frozen.prior_offset);
  const Eigen::Vector4d step = factor.solve(rhs);
  // The prior acts as four more exact observations; the projected residual of the real ones is C^-1 (r − J step).
  const Eigen::VectorXd left = frozen.residual - frozen.by_unknowns * step;
  const Eigen::VectorXd projected = apply_inverse(sn, noise, frozen.flux, left).col(0);
  const Eigen::Vector4d prior_left = frozen.prior_offset - step;
  double log_normal = 0;
  for (Eigen::Index k = 0; k < 4; ++k) log_normal += 2 * std::log(factor.matrixL()(k, k));
  out.log_likelihood = -0.5 * (left.dot(projected) + prior_left.cwiseAbs2().dot(frozen.prior_inverse) +
                               log_determinant(sn, noise, frozen.flux) + log_normal);
  const Eigen::MatrixXd half = factor.matrixL().solve(weighted.transpose());  // 4 × n; P = C^-1 − half' half
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const auto begin = static_cast<Eigen::Index>(sn.bands[b].begin);
    const auto count = static_cast<Eigen::Index>(sn.bands[b].end) - begin;
    const auto f = frozen.flux.segment(begin, count);
    const Eigen::VectorXd v = f.cwiseQuotient(noise.variance.segment(begin, count));
    const double square = noise.colour_scatter[b] * noise.colour_scatter[b];
    const double shrink = square / (1 + square * f.dot(v));
    const Eigen::VectorXd inverse_f = v * (1 - shrink * f.dot(v));
    const Eigen::VectorXd half_f = half.middleCols(begin, count) * f;
    const double trace = f.dot(inverse_f) - half_f.squaredNorm();
    const double quadratic = f.dot(projected.segment(begin, count));
    // ∂C/∂ln κ = 2 κ² f f'.
    const double slope = square * (quadratic * quadratic - trace);
    const double curvature = 2 * square * square * trace * trace;
    const NodeWeights& w = frozen.band_nodes[b];
    for (std::size_t k = 0; k < 2; ++k) {
      const Eigen::Index row = epoch_nodes + w.node[k];
      out.gradient(row) += w.value[k] * slope;
      for (std::size_t l = 0; l < 2; ++l) {
        out.information(row, epoch_nodes + w.node[l]) += w.value[k] * w.value[l] * curvature;
      }
    }
    for (Eigen::Index i = begin; i < begin + count; ++i) {
      const double diagonal = 1 / noise.variance(i) - shrink * v(i - begin) * v(i - begin) - half.col(i).squaredNorm();
      // ∂C_ii/∂ln ε = 2 ε² f².
      const double epoch_slope = epoch_part(i) * (projected(i) * projected(i) - diagonal);
      const double epoch_curvature = 2 * epoch_part(i) * epoch_part(i) * diagonal * diagonal;
      const NodeWeights& e = frozen.epoch_nodes[static_cast<std::size_t>(i)];
      for (std::size_t k = 0; k < 4; ++k) {
        out.gradient(e.node[k]) += e.value[k] * epoch_slope;
        for (std::size_t l = 0; l < 4; ++l)
          out.information(e.node[k], e.node[l]) += e.value[k] * e.value[l] * epoch_curvature;
      }
    }
  }
  return out;
}

void add_prior(const SpectralTemplate& model, const Eigen::VectorXd& nodes, int epoch_nodes,
               const ScatterOptions& options, Score& into) {
  const double level = 1 / (options.level_width * options.level_width);
  const double tie = 1 / (options.neighbour_width * options.neighbour_width);
  for (Eigen::Index i = 0; i < nodes.size(); ++i) {
    const double off = nodes(i) - std::log(i < epoch_nodes ? 0.04 : 0.03);
    into.log_likelihood -= 0.5 * level * off * off;
    into.gradient(i) -= level * off;
    into.information(i, i) += level;
  }
  const auto pair = [&](int i, int j) {
    const double off = nodes(i) - nodes(j);
    into.log_likelihood -= 0.5 * tie * off * off;
    into.gradient(i) -= tie * off;
    into.gradient(j) += tie * off;
    into.information(i, i) += tie;
    into.information(j, j) += tie;
    into.information(i, j) -= tie;
    into.information(j, i) -= tie;
  };
  const auto columns = static_cast<int>(model.scatter_wavelength.size());
  for (int i = 0; i < epoch_nodes; ++i) {
    if ((i + 1) % columns != 0) pair(i, i + 1);
    if (i + columns < epoch_nodes) pair(i, i + columns);
  }
  for (int i = epoch_nodes; i + 1 < static_cast<int>(nodes.size()); ++i) pair(i, i + 1);
}

}  // namespace

double fit_scatter(SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                   std::span<const SupernovaUnknowns> unknowns, std::span<const Eigen::VectorXd> robust_weights,
                   const UnknownsPrior& prior, const ScatterOptions& options, int threads) {
  std::vector<Frozen> frozen(supernovae.size());
  parallel_for(supernovae.size(), threads,
               [&](std::size_t k) { frozen[k] = freeze(model, supernovae[k], unknowns[k], robust_weights[k], prior); });
  using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
  const auto epoch_nodes = static_cast<int>(model.log_epoch_scatter.size());
  Eigen::VectorXd nodes(epoch_nodes + model.log_colour_scatter.size());
  Eigen::Map<RowMajor>(nodes.data(), model.log_epoch_scatter.rows(), model.log_epoch_scatter.cols()) =
      model.log_epoch_scatter;
  nodes.tail(model.log_colour_scatter.size()) = model.log_colour_scatter;

  const auto total = [&](const Eigen::VectorXd& at) {
    std::vector<Score> each(supernovae.size());
    parallel_for(supernovae.size(), threads,
                 [&](std::size_t k) { each[k] = score(supernovae[k], frozen[k], at, epoch_nodes); });
    Score sum{0, Eigen::VectorXd::Zero(at.size()), Eigen::MatrixXd::Zero(at.size(), at.size())};
    for (const Score& one : each) {
      sum.log_likelihood += one.log_likelihood;
      sum.gradient += one.gradient;
      sum.information += one.information;
    }
    add_prior(model, at, epoch_nodes, options, sum);
    return sum;
  };
  Score now = total(nodes);
  double damping = 1e-3;
  for (int step = 0; step < options.iterations; ++step) {
    Eigen::MatrixXd system = now.information;
    system.diagonal() *= 1 + damping;
    Eigen::VectorXd move = Eigen::LDLT<Eigen::MatrixXd>(system).solve(now.gradient);
    const double largest = move.cwiseAbs().maxCoeff();
    if (largest > 1.0) move /= largest;
    const Score next = total(nodes + move);
    if (next.log_likelihood >= now.log_likelihood) {
      const bool settled = next.log_likelihood - now.log_likelihood < 1e-4;
      nodes += move;
      now = next;
      damping = std::max(1e-6, damping / 5);
      if (settled) break;
    } else {
      damping *= 10;
      if (damping > 1e8) break;
    }
  }
  model.log_epoch_scatter =
      Eigen::Map<const RowMajor>(nodes.data(), model.log_epoch_scatter.rows(), model.log_epoch_scatter.cols());
  model.log_colour_scatter = nodes.tail(model.log_colour_scatter.size());
  return now.log_likelihood;
}

}  // namespace thirdrung
