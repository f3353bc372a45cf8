#pragma once

#include <Eigen/Core>
#include <vector>

#include "lightcurve/model_flux.h"

namespace thirdrung {

/// Covariance of the selected observations, C = D + Σ_bands κ_b² f_b f_b^T with D diagonal, in the form that whitens:
/// within a band C = D^½ (1 + v v^T) D^½, v = κ D^−½ f, and (1 + v v^T)^−½ = 1 − β v v^T with
/// β = (1 − (1 + v²)^−½) / v².
class Noise {
 public:
  /// @param flux model flux that ε and κ scale with.
  /// @param weights of the robust loss, one an observation (empty: all 1): D is divided by them.
  Noise(const ObservedBands& observed, const Selection& selection, const SpectralTemplate& model, const Parameters& at,
        const Eigen::VectorXd& flux, const std::vector<double>& weights, bool template_scatter);

  /// Turns a column of residuals or derivatives into one of unit covariance, in place.
  template <typename Vector>
  void whiten(Vector&& column) const {
    column.array() *= inverse_root_.array();
    for (const Band& band : bands_) {
      auto part = column.segment(band.first, band.count);
      const auto v = direction_.segment(band.first, band.count);
      part -= (band.beta * v.dot(part)) * v;
    }
  }

  double log_determinant() const { return log_determinant_; }

  /// Pull of every observation against its own error, before the robust weights, once the best common offset of its
  /// band is taken out of the residuals.
  std::vector<double> own_pulls(const Eigen::VectorXd& residuals) const;

 private:
  struct Band {
    Eigen::Index first = 0;
    Eigen::Index count = 0;
    double beta = 0;
    double v_squared = 0;
  };

  std::vector<Band> bands_;
  Eigen::VectorXd inverse_root_;  ///< D^−½.
  Eigen::VectorXd direction_;     ///< v, band by band.
  std::vector<double> root_weight_;
  double log_determinant_ = 0;
};

}  // namespace thirdrung
