#pragma once

#include <Eigen/Core>
#include <vector>

#include "template/coefficients.h"
#include "template/spectral_template.h"
#include "training/training_set.h"

namespace thirdrung {

using Locals = Eigen::Matrix<double, Eigen::Dynamic, 4>;  ///< One row an epoch, columns t_0, m_B, s, c.

/// Model fluxes of one supernova and their derivatives in its own four unknowns.
struct SupernovaModel {
  Eigen::VectorXd flux;  ///< [uJy], one an epoch.
  Locals by_unknowns;    ///< ∂flux/∂(t_0, m_B, s, c).
};

/// Derivative of the flux of one epoch in the template's coefficients: outer products of a phase part (four values) and
/// a wavelength part.
struct EpochGradient {
  CubicBasis::Weights phi_phase, gamma_phase;
  Eigen::VectorXd phi, gamma, colour;         ///< Wavelength parts, over the ranges of the epoch's band.
  Eigen::VectorXd gamma_share, colour_share;  ///< Σ flux × basis: gamma and colour without their factors s − 1 and c.
};

/// Noise model of one supernova about the template (docs/methods.md, "Fit of one supernova").
struct SupernovaNoise {
  Eigen::VectorXd variance;            ///< Of each epoch, σ² + (ε f)² over its robust weight [uJy²].
  std::vector<double> colour_scatter;  ///< κ of each band.
};

/// @param gradients filled, one an epoch, if not null.
SupernovaModel evaluate_supernova(const SpectralTemplate& model, const TrainingSupernova& sn,
                                  const SupernovaUnknowns& at, std::vector<EpochGradient>* gradients = nullptr);

/// @param robust_weight one an epoch, 1 for a trusted one.
SupernovaNoise supernova_noise(const SpectralTemplate& model, const TrainingSupernova& sn, const SupernovaUnknowns& at,
                               const Eigen::VectorXd& flux, const Eigen::VectorXd& robust_weight);

/// C^−1 applied to each column of `rows` (Sherman–Morrison, band by band).
Eigen::MatrixXd apply_inverse(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& flux,
                              const Eigen::MatrixXd& rows);

/// ln det C.
double log_determinant(const TrainingSupernova& sn, const SupernovaNoise& noise, const Eigen::VectorXd& flux);

/// Adds `scale` × the gradient to a vector over all coefficients.
void add_gradient(const CoefficientLayout& layout, const TrainingBand& band, const EpochGradient& gradient,
                  double scale, Eigen::Ref<Eigen::VectorXd> into);
/// The gradient's product with a vector over all coefficients.
double gradient_along(const CoefficientLayout& layout, const TrainingBand& band, const EpochGradient& gradient,
                      const Eigen::VectorXd& direction);

}  // namespace thirdrung
