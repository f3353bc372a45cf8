#pragma once

#include <Eigen/Core>
#include <filesystem>
#include <string>
#include <vector>

#include "template/spectral_template.h"
#include "training/normal_equations.h"

namespace thirdrung {

/// Which spectra to train on, and how far to trust them.
struct SpectraOptions {
  std::string phase_qualities = "ABC";
  std::vector<std::string> subtypes = {"normal"};
  double least_match = 0.6;          ///< Least correlation with the mean sequence.
  double most_phase_mismatch = 6.0;  ///< Largest difference of tabulated phase and phase of best match [d].
  double phase_min = -16, phase_max = 55;
  double wavelength_min = 3300, wavelength_max = 9200;  ///< [angstrom].
  double warp_step = 700;                               ///< Knots of the smooth warp that is divided out [angstrom].
  double correlation_length = 50;  ///< Over which one spectrum's departures from the mean go together [angstrom].
  double phase_error = 0.7;        ///< Added in quadrature to each spectrum's own [d].
};

/// One rest-frame spectrum: ln flux against wavelength with the warp's basis.
struct TrainingSpectrum {
  std::string supernova;
  double phase = 0, phase_error = 1;
  std::vector<double> wavelength;
  Eigen::VectorXd log_flux, log_flux_error;
  CubicBasis warp;
  Eigen::VectorXd warp_coefficients;
  double phase_offset = 0;  ///< Fitted along, with prior phase_error [d].
};

/// Reads the spectra file described in docs/formats.md and applies the options. `left_out` gets "reason: count" lines.
std::vector<TrainingSpectrum> read_training_spectra(const std::filesystem::path& path, const SpectraOptions& options,
                                                    std::vector<std::string>& left_out);

/// Adds the spectra to a system, with each spectrum's warp and phase offset eliminated exactly, at s = 1 (the features'
/// change with stretch is left to the photometry) and any colour taken up by the warp. `scatter` is the intrinsic
/// scatter of ln flux. Returns ½ r^T C^−1 r. With `into` null only that sum is computed.
double add_spectra(const SpectralTemplate& model, std::vector<TrainingSpectrum>& spectra, double scatter,
                   double correlation_length, int threads, NormalEquations* into);

/// Fits every spectrum's warp and phase offset to the template as it stands.
void fit_warps(const SpectralTemplate& model, std::vector<TrainingSpectrum>& spectra, double scatter,
               double correlation_length, int threads);

/// Maximum-likelihood intrinsic scatter of ln flux about the template.
double spectra_scatter(const SpectralTemplate& model, const std::vector<TrainingSpectrum>& spectra);

}  // namespace thirdrung
