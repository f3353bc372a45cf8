#pragma once

#include <Eigen/Core>
#include <array>
#include <span>
#include <string>
#include <vector>

#include "training/normal_equations.h"
#include "training/scatter_fit.h"

namespace thirdrung {

/// Restricted likelihood of everything that makes up the noise of a training set: the nodes of ln ε (row by row) and of
/// ln κ, and the logarithm of the factor on the measured errors of each survey's passbands.
///
/// Each supernova's four unknowns are integrated out along the linear model, so that the freedom they take from the
/// residuals is paid for (Patterson & Thompson 1971, Biometrika 58, 545). Every epoch counts in full: a scatter that
/// left out the tails would make ordinary supernovae look impossible.
class ScatterLikelihood {
 public:
  /// One passband of one survey, and what of it is in the set.
  struct Passband {
    std::string survey, passband;
    int supernovae = 0, epochs = 0;
  };
  /// A template without scatter has no nodes of ε and κ.
  ScatterLikelihood(const SpectralTemplate& model, std::span<const TrainingSupernova> supernovae,
                    std::span<const SupernovaUnknowns> unknowns, const UnknownsPrior& prior,
                    const ScatterOptions& options, int threads);

  const std::vector<Passband>& passbands() const { return passbands_; }  ///< In order of survey and passband.
  int epoch_nodes() const { return epoch_nodes_; }
  int colour_nodes() const { return colour_nodes_; }
  /// ln ε and ln κ of the template, and zeros.
  Eigen::VectorXd start() const;

  struct Value {
    double log_likelihood = 0;
    Eigen::VectorXd gradient;
    Eigen::MatrixXd information;  ///< Expected, approximately: minus the curvature.
  };
  /// With the priors, at ln ε, ln κ and ln of the factors.
  Value at(const Eigen::VectorXd& nodes) const;

  /// Climbs from `nodes` over those from `first` on, `count` of them; the others are held. Returns the last value.
  Value climb(Eigen::VectorXd& nodes, Eigen::Index first, Eigen::Index count) const;

 private:
  /// Bilinear (or linear) weights of the nodes that one place falls between.
  struct NodeWeights {
    std::array<int, 4> node{};
    std::array<double, 4> value{};
    double of(const Eigen::VectorXd& nodes) const;
  };
  /// One supernova with everything that does not change with the nodes.
  struct Frozen {
    Eigen::VectorXd flux, residual, measured_variance;
    Locals by_unknowns;
    Eigen::Vector4d prior_inverse, prior_offset;
    std::vector<NodeWeights> epoch_nodes;  ///< One an epoch.
    std::vector<NodeWeights> band_nodes;   ///< One a band.
    std::vector<int> factor_nodes;         ///< One a band.
  };
  Frozen freeze(const TrainingSupernova& sn, const SupernovaUnknowns& at) const;
  Value of_one(const TrainingSupernova& sn, const Frozen& frozen, const Eigen::VectorXd& nodes) const;
  void add_prior(const Eigen::VectorXd& nodes, Value& into) const;

  const SpectralTemplate& model_;
  std::span<const TrainingSupernova> supernovae_;
  UnknownsPrior prior_;
  ScatterOptions options_;
  int threads_;
  int epoch_nodes_, colour_nodes_;
  std::vector<Passband> passbands_;
  std::vector<Frozen> frozen_;
};

}  // namespace thirdrung
