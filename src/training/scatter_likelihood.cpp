#include "training/scatter_likelihood.h"

#include <Eigen/Cholesky>
#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <tuple>

#include "base/parallel.h"

namespace thirdrung {

namespace {

std::pair<int, double> between(const std::vector<double>& nodes, double x) {
  if (x <= nodes.front()) return {0, 0.0};
  if (x >= nodes.back()) return {static_cast<int>(nodes.size()) - 2, 1.0};
  const auto left = static_cast<int>(std::upper_bound(nodes.begin(), nodes.end(), x) - nodes.begin()) - 1;
  const auto l = static_cast<std::size_t>(left);
  return {left, (x - nodes[l]) / (nodes[l + 1] - nodes[l])};
}

}  // namespace

double ScatterLikelihood::NodeWeights::of(const Eigen::VectorXd& nodes) const {
  double sum = 0;
  for (std::size_t k = 0; k < 4; ++k) {
    if (value[k] != 0.0) sum += value[k] * nodes(node[k]);
  }
  return sum;
}

ScatterLikelihood::ScatterLikelihood(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                                     std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                                     const ScatterOptions& options, int threads)
    : model_(model),
      supernovae_(supernovae),
      prior_(prior),
      options_(options),
      threads_(threads),
      epoch_nodes_(static_cast<int>(model.log_epoch_scatter.size())),
      colour_nodes_(static_cast<int>(model.log_colour_scatter.size())),
      frozen_(supernovae.size()) {
  std::map<std::pair<std::string, std::string>, Passband> found;
  for (const TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) {
      Passband& passband = found[{sn.survey, band.passband}];
      ++passband.supernovae;
      passband.epochs += static_cast<int>(band.end - band.begin);
    }
  }
  std::map<std::pair<std::string, std::string>, int> node;
  for (auto& [key, passband] : found) {
    node[key] = epoch_nodes_ + colour_nodes_ + static_cast<int>(passbands_.size());
    passbands_.push_back({key.first, key.second, passband.supernovae, passband.epochs});
  }
  parallel_for(supernovae.size(), threads, [&](std::size_t k) {
    frozen_[k] = freeze(supernovae[k], unknowns[k]);
    for (const TrainingBand& band : supernovae[k].bands)
      frozen_[k].factor_nodes.push_back(node.at({supernovae[k].survey, band.passband}));
  });
}

Eigen::VectorXd ScatterLikelihood::start() const {
  using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;
  Eigen::VectorXd nodes =
      Eigen::VectorXd::Zero(epoch_nodes_ + colour_nodes_ + static_cast<Eigen::Index>(passbands_.size()));
  if (epoch_nodes_ > 0) {
    Eigen::Map<RowMajor>(nodes.data(), model_.log_epoch_scatter.rows(), model_.log_epoch_scatter.cols()) =
        model_.log_epoch_scatter;
  }
  if (colour_nodes_ > 0) nodes.segment(epoch_nodes_, colour_nodes_) = model_.log_colour_scatter;
  return nodes;
}

ScatterLikelihood::Frozen ScatterLikelihood::freeze(const TrainingSupernova& sn, const SupernovaUnknowns& at) const {
  Frozen out;
  const SupernovaModel values = evaluate_supernova(model_, sn, at);
  out.flux = values.flux;
  out.by_unknowns = values.by_unknowns;
  out.residual.resize(values.flux.size());
  out.measured_variance.resize(values.flux.size());
  out.epoch_nodes.resize(sn.epochs.size());
  const auto columns = static_cast<int>(model_.scatter_wavelength.size());
  for (const TrainingBand& band : sn.bands) {
    int col = 0;
    double across = 0;
    if (epoch_nodes_ > 0) std::tie(col, across) = between(model_.scatter_wavelength, band.weights.mean_wavelength);
    for (std::size_t e = band.begin; e < band.end; ++e) {
      const auto row = static_cast<Eigen::Index>(e);
      out.residual(row) = sn.epochs[e].flux - values.flux(row);
      out.measured_variance(row) = sn.epochs[e].flux_error * sn.epochs[e].flux_error;
      if (epoch_nodes_ == 0) continue;
      const auto [line, along] = between(model_.scatter_phase, (sn.epochs[e].mjd - at.t_0) / (1 + sn.z_helio));
      out.epoch_nodes[e] = {
          {line * columns + col, line * columns + col + 1, (line + 1) * columns + col, (line + 1) * columns + col + 1},
          {(1 - along) * (1 - across), (1 - along) * across, along * (1 - across), along * across}};
    }
    if (colour_nodes_ == 0) {
      out.band_nodes.emplace_back();
      continue;
    }
    const auto [node, beyond] = between(model_.colour_scatter_wavelength, band.weights.mean_wavelength);
    out.band_nodes.push_back({{epoch_nodes_ + node, epoch_nodes_ + node + 1, 0, 0}, {1 - beyond, beyond, 0, 0}});
  }
  out.prior_inverse << 0, 0, 1 / (prior_.s_width * prior_.s_width), 1 / (prior_.c_width * prior_.c_width);
  out.prior_offset << 0, 0, prior_.s_mean - at.s, prior_.c_mean - at.c;
  return out;
}

/// With P the residual projector of the generalised least-squares fit, ∂L = ½ r'P ∂C P r − ½ tr(P ∂C).
ScatterLikelihood::Value ScatterLikelihood::of_one(const TrainingSupernova& sn, const Frozen& frozen,
                                                   const Eigen::VectorXd& nodes) const {
  const auto size = nodes.size();
  Value out{0, Eigen::VectorXd::Zero(size), Eigen::MatrixXd::Zero(size, size)};
  const auto n = frozen.flux.size();
  SupernovaNoise noise;
  noise.variance.resize(n);
  Eigen::VectorXd epoch_part(n), measured_part(n);
  for (std::size_t b = 0; b < sn.bands.size(); ++b) {
    const double factor = std::exp(2 * nodes(frozen.factor_nodes[b]));
    for (std::size_t e = sn.bands[b].begin; e < sn.bands[b].end; ++e) {
      const auto i = static_cast<Eigen::Index>(e);
      const double epsilon = epoch_nodes_ == 0 ? 0 : std::exp(frozen.epoch_nodes[e].of(nodes));
      epoch_part(i) = epsilon * epsilon * frozen.flux(i) * frozen.flux(i);
      measured_part(i) = factor * frozen.measured_variance(i);
      noise.variance(i) = measured_part(i) + epoch_part(i);
    }
    noise.colour_scatter.push_back(colour_nodes_ == 0 ? 0 : std::exp(frozen.band_nodes[b].of(nodes)));
  }

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
      out.gradient(w.node[k]) += w.value[k] * slope;
      for (std::size_t l = 0; l < 2; ++l) out.information(w.node[k], w.node[l]) += w.value[k] * w.value[l] * curvature;
    }
    for (Eigen::Index i = begin; i < begin + count; ++i) {
      const double diagonal = 1 / noise.variance(i) - shrink * v(i - begin) * v(i - begin) - half.col(i).squaredNorm();
      // ∂C_ii is 2 ε² f² for ln ε and 2 σ² for the logarithm of the factor on σ.
      const double pull = projected(i) * projected(i) - diagonal;
      const double strength = 2 * diagonal * diagonal;
      const NodeWeights& e = frozen.epoch_nodes[static_cast<std::size_t>(i)];
      std::array<std::pair<int, double>, 5> parts;
      for (std::size_t k = 0; k < 4; ++k) parts[k] = {e.node[k], e.value[k] * epoch_part(i)};
      parts[4] = {frozen.factor_nodes[b], measured_part(i)};
      for (const auto& [row, part] : parts) {
        out.gradient(row) += part * pull;
        for (const auto& [column, other] : parts) out.information(row, column) += part * other * strength;
      }
    }
  }
  return out;
}

void ScatterLikelihood::add_prior(const Eigen::VectorXd& nodes, Value& into) const {
  const auto hold = [&](Eigen::Index i, double centre, double width) {
    const double off = nodes(i) - centre;
    into.log_likelihood -= 0.5 * off * off / (width * width);
    into.gradient(i) -= off / (width * width);
    into.information(i, i) += 1 / (width * width);
  };
  const int scatter_nodes = epoch_nodes_ + colour_nodes_;
  for (int i = 0; i < scatter_nodes; ++i) hold(i, std::log(i < epoch_nodes_ ? 0.04 : 0.03), options_.level_width);
  for (Eigen::Index i = scatter_nodes; i < nodes.size(); ++i) hold(i, 0, options_.factor_width);
  const double tie = 1 / (options_.neighbour_width * options_.neighbour_width);
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
  const auto columns = static_cast<int>(model_.scatter_wavelength.size());
  for (int i = 0; i < epoch_nodes_; ++i) {
    if ((i + 1) % columns != 0) pair(i, i + 1);
    if (i + columns < epoch_nodes_) pair(i, i + columns);
  }
  for (int i = epoch_nodes_; i + 1 < scatter_nodes; ++i) pair(i, i + 1);
}

ScatterLikelihood::Value ScatterLikelihood::at(const Eigen::VectorXd& nodes) const {
  // In blocks: an information matrix for every one of thousands of supernovae would fill the memory.
  constexpr std::size_t block = 64;
  std::vector<Value> each(std::min(block, supernovae_.size()));
  Value sum{0, Eigen::VectorXd::Zero(nodes.size()), Eigen::MatrixXd::Zero(nodes.size(), nodes.size())};
  for (std::size_t first = 0; first < supernovae_.size(); first += block) {
    const std::size_t count = std::min(block, supernovae_.size() - first);
    parallel_for(count, threads_,
                 [&](std::size_t k) { each[k] = of_one(supernovae_[first + k], frozen_[first + k], nodes); });
    for (std::size_t k = 0; k < count; ++k) {
      sum.log_likelihood += each[k].log_likelihood;
      sum.gradient += each[k].gradient;
      sum.information += each[k].information;
    }
  }
  add_prior(nodes, sum);
  return sum;
}

ScatterLikelihood::Value ScatterLikelihood::climb(Eigen::VectorXd& nodes, Eigen::Index first,
                                                  Eigen::Index count) const {
  Value now = at(nodes);
  double damping = 1e-3;
  for (int step = 0; step < options_.iterations; ++step) {
    Eigen::MatrixXd system = now.information.block(first, first, count, count);
    system.diagonal() *= 1 + damping;
    Eigen::VectorXd move = Eigen::LDLT<Eigen::MatrixXd>(system).solve(now.gradient.segment(first, count));
    const double largest = move.cwiseAbs().maxCoeff();
    if (largest > 1.0) move /= largest;
    Eigen::VectorXd trial = nodes;
    trial.segment(first, count) += move;
    Value next = at(trial);
    if (next.log_likelihood >= now.log_likelihood) {
      const bool settled = next.log_likelihood - now.log_likelihood < 1e-4;
      nodes = std::move(trial);
      now = std::move(next);
      damping = std::max(1e-6, damping / 5);
      if (settled) break;
    } else {
      damping *= 10;
      if (damping > 1e8) break;
    }
  }
  return now;
}

}  // namespace thirdrung
