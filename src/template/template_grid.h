#pragma once

#include <Eigen/Core>
#include <array>
#include <memory>
#include <vector>

#include "template/phase_nodes.h"
#include "template/spectral_template.h"

namespace thirdrung {

/// Where a template is tabulated before it is integrated over passbands.
struct TemplateGridOptions {
  double phase_min = -20;         ///< In q = p/s [d]; cut to the template's own phases.
  double phase_max = 60;          ///< [d]
  double phase_step = 1.0;        ///< Widest gap between nodes [d]; the breakpoints of Φ are nodes too.
  double wavelength_step = 25.0;  ///< [angstrom]; must be that of the BandWeights it is used with.
};

/// One template at fixed phases and rest-frame wavelengths: e^Φ Γ^a for a = 0..4, and powers of k = −0.921 K.
///
/// Made once a template. It turns the building of a BandTable into a few small matrix products, since neither Φ, Γ nor
/// K depends on the supernova.
class TemplateGrid {
 public:
  static constexpr int orders = 5;  ///< Powers 0..4 of Γ and of K.
  static constexpr Eigen::Index row_block = 4;
  /// Colour about which band tables are expanded [mag], amid those that occur.
  static constexpr double centre_colour = 0.2;

  explicit TemplateGrid(SpectralTemplate model, const TemplateGridOptions& options = {});

  const SpectralTemplate& model() const { return model_; }
  const std::shared_ptr<const PhaseNodes>& nodes() const { return nodes_; }
  double wavelength_step() const { return step_; }

  /// Column of a wavelength that is a multiple of the step; the first or last column outside the grid, where the
  /// template is constant.
  Eigen::Index column(long multiple) const;
  /// e^Φ Γ^power, nodes × wavelengths; the rows are filled up with zeros to a multiple of row_block.
  const Eigen::MatrixXd& flux_times_gamma(int power) const {
    return flux_times_gamma_[static_cast<std::size_t>(power)];
  }
  /// k^power e^(k centre_colour) in column `power`, one row a wavelength.
  const Eigen::MatrixXd& colour_powers() const { return colour_powers_; }

 private:
  SpectralTemplate model_;
  std::shared_ptr<const PhaseNodes> nodes_;
  double step_ = 0;
  long first_multiple_ = 0;
  std::array<Eigen::MatrixXd, orders> flux_times_gamma_;
  Eigen::MatrixXd colour_powers_;
};

}  // namespace thirdrung
