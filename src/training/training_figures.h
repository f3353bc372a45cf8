#pragma once

#include <span>

#include "training/residual_summary.h"
#include "training/svg_plot.h"

namespace thirdrung {

// Figures of the training report. Shading is the 1σ error of the training, from TrainingResult::covariance.

/// Light curves in U B V R I of the fiducial supernova, of four other stretches, and of three other colours; each band
/// relative to the fiducial supernova at B maximum.
SvgPlot light_curve_figure(const TrainingResult& result);
/// Fiducial spectra at eight phases.
SvgPlot spectra_figure(const TrainingResult& result);
/// K beside Fitzpatrick (1999) reddening of R_V 2 and 3.1 in the same normalisation, and its difference from R_V 3.1.
SvgPlot colour_law_figure(const TrainingResult& result);
/// Γ, ε and κ.
SvgPlot scatter_figure(const TrainingResult& result);
/// Offsets and χ² of held-out points by passband, phase and redshift.
SvgPlot residual_figure(std::span<const HeldOutPoint> points);
/// Mean pull of held-out points over phase and rest wavelength.
SvgPlot residual_map_figure(std::span<const HeldOutPoint> points);
SvgPlot cross_validation_figure(const CrossValidationResult& result);
SvgPlot offsets_figure(std::span<const ZeroPointOffset> offsets);

/// Bins that figures and report share.
std::vector<double> phase_bin_edges();
std::vector<double> redshift_bin_edges();
struct WavelengthZone {
  std::string name;
  double blue = 0, red = 0;  ///< [angstrom]
};
std::vector<WavelengthZone> wavelength_zones();
/// The points of one zone.
std::vector<HeldOutPoint> in_zone(std::span<const HeldOutPoint> points, const WavelengthZone& zone);

/// Covariance of the wavelength coefficients of Φ at one phase, from that of all coefficients.
Eigen::MatrixXd phi_slice_covariance(const TrainingResult& result, double q);

/// K that a reddening law would have in the gauge of this template: (A(λ) − ⟨A⟩_B)/(⟨A⟩_B − ⟨A⟩_V).
double reddening_as_colour(const Extinction& law, const SpectralTemplate& model, double wavelength);

}  // namespace thirdrung
