#pragma once

#include <Eigen/Core>
#include <limits>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "base/progress.h"
#include "light/dust_law.h"
#include "light/passband_catalogue.h"
#include "lightcurve/photometry.h"
#include "lightcurve/prepared_template.h"
#include "lightcurve/remarks.h"
#include "sample/supernova.h"

namespace thirdrung {

/// A Gaussian prior.
struct Prior {
  double mean = 0;
  double width = 1;
};

/// How light curves are fitted. Phases are in rest-frame days from t_0 (not divided by s).
struct FitOptions {
  double phase_min = -15;  ///< Earlier epochs are not used [d].
  double phase_max = 45;   ///< Later epochs are not used [d].

  bool template_scatter = true;  ///< Count the template's ε and κ among the errors.
  bool robust = false;           ///< Cauchy loss on single epochs, see fit_light_curve.
  double robust_scale = 3;       ///< Pull at which an epoch's weight is one half.
  double mistrust_below = 0.3;   ///< Weight below which an epoch is called mistrusted, and left out of χ².
  double most_mistrusted = 0.2;  ///< Of the epochs; beyond it the fit is not trusted.

  double s_min = 0.4, s_max = 1.7;
  double c_min = -0.6, c_max = 1.2;  ///< [mag]
  double window_before = 30;         ///< t_0 is sought from this long before the first epoch, rest frame [d],
  double window_after = 20;          ///< to this long after the last.
  std::optional<Prior> s_prior;      ///< None by default.
  std::optional<Prior> c_prior;

  /// A fit whose first phase is beyond `late_start` is called late, and not trusted, where the error of t_0 is above
  /// `late_t_0_error`, rest frame, or nothing is seen before `latest_start` [d]. Measured: docs/validation.md.
  double late_start = 5, late_t_0_error = 1, latest_start = 10;
  /// χ² is called impossible where fit_probability is below the first and χ² per degree of freedom above the second:
  /// the template's scatter is an average over supernovae, and a long light curve of an odd one can exceed it in
  /// probability without being far off.
  double improbable = 1e-6;
  double impossible_chi2_per_dof = 3;
  double competing_chi2 = 6;     ///< A second solution within this of the best, in −2 ln L, competes.
  double largest_t_0_error = 3;  ///< Errors beyond which a fit is weakly determined [d],
  double largest_s_error = 0.3;
  double largest_c_error = 0.3;  ///< [mag].

  bool curves = false;  ///< Also keep the smooth model curves.
};

/// A band that was not fitted.
struct BandLeftOut {
  std::string passband;
  std::string reason;
};

/// One epoch that was fitted.
struct FittedEpoch {
  std::size_t epoch = 0;   ///< Index into LightCurve::epochs.
  double phase = 0;        ///< Rest frame [d].
  double model_flux = 0;   ///< [uJy]
  double model_error = 0;  ///< Scatter of real supernovae about the template, f √(ε² + κ²) [uJy].
  double pull = 0;         ///< (flux − model) over all errors in quadrature.
  double freedom = 1;      ///< What is expected of pull², 1 less what the four parameters take out of it.
  double weight = 1;       ///< Of the robust loss.
  bool mistrusted = false;
};

/// One point of a smooth model curve.
struct CurvePoint {
  std::size_t passband = 0;  ///< Index into LightCurve::passbands.
  double phase = 0;          ///< [d]
  double mjd = 0;            ///< [d]
  double model_flux = 0;     ///< [uJy]
  double model_error = 0;    ///< [uJy]
};

/// A second solution that fits nearly as well.
struct CompetingSolution {
  double t_0 = 0;  ///< [d]
  double m_b = 0;  ///< [mag]
  double s = 0;
  double c = 0;           ///< [mag]
  double delta_chi2 = 0;  ///< −2 ln L above the best solution's.
};

/// What was measured of one supernova. Parameters are ordered (t_0, m_B, s, c) throughout.
struct LightCurveFit {
  std::string supernova;
  std::string survey;
  double z_helio = missing_value;
  double t_0 = missing_value;  ///< Date of B maximum at s = 1 of the template [d].
  double m_b = missing_value;  ///< Rest-frame peak B magnitude.
  double s = missing_value;
  double c = missing_value;  ///< [mag]
  Eigen::Matrix4d covariance = Eigen::Matrix4d::Constant(missing_value);
  double chi2 = missing_value;
  int dof = 0;
  double fit_probability = missing_value;  ///< Chance of a larger χ² (1 without degrees of freedom).
  std::vector<std::string> bands_used;     ///< From blue to red; with an epoch that is not mistrusted.
  std::vector<BandLeftOut> bands_left_out;
  int epochs_used = 0;                 ///< Without those mistrusted, like chi2, dof and the two phases.
  double first_phase = missing_value;  ///< Rest frame [d].
  double last_phase = missing_value;   ///< [d]
  double dm15_b = missing_value;       ///< Decline of rest-frame B in 15 d [mag].
  std::optional<CompetingSolution> competing;
  std::vector<Remark> remarks;
  std::vector<FittedEpoch> epochs;
  std::vector<CurvePoint> curves;
  int iterations = 0;  ///< Times that the covariance of the data was rebuilt.

  /// No remark voids it (voids_trust): it converged inside its bounds, from at least two bands, five epochs and data
  /// that start in time, without a rival, with errors small enough for a Gaussian and a χ² that chance allows.
  bool trusted() const;
  int mistrusted_epochs() const;
};

/// Whether a covariance of (t_0, m_B, s, c) is finite and positive definite, told from its correlations so that units
/// do not count.
bool is_definite(const Eigen::Matrix4d& covariance);

/// Fits one supernova: minimises r^T C^−1 r over (t_0, m_B, s, c), with
///
///   C = diag(σ² + (ε f)²) + Σ_bands κ_b² f_b f_b^T,
///
/// f the model flux, ε(p, λ) and κ(λ) the template's scatter at the band's mean rest wavelength. C is held during each
/// solution and rebuilt from its answer until no parameter moves by 1e-4 σ. Covariance: (J^T C^−1 J)^−1 at the end.
///
/// Starts: a scan in t_0 (every 3 rest-frame days) and s with the amplitude solved for linearly in every band, c = 0;
/// negative amplitudes are rejected. Every minimum of the scan that is nearly as good as the best is followed to its
/// end. Solutions are compared by −2 ln L = r^T C^−1 r + ln |C| over all epochs that any of them uses.
/// Epochs: those within the phases of the options and the template, by the t_0 and s of the start, held fixed; where
/// the solution would choose others, they are chosen anew once and the fit repeated, never a third time.
/// Bands: those whose core (98% of their light) lies within the template's wavelengths.
/// With one band c, and with fewer than five epochs s and c, get the wide priors c = 0 ± 0.3 and s = 1 ± 0.2.
/// Robust loss (off by default): every epoch's own variance is divided by its weight 1/(1 + (p/k)²), the weight of the
/// Cauchy loss k² ln(1 + (p/k)²), p the pull after the band's common offset is taken out, k the robust scale.
///
/// @param supernova needs z_helio > 0 and mw_ebv; throws InputError at its place otherwise.
/// A light curve that cannot be fitted returns with the remark that says why and without numbers.
LightCurveFit fit_light_curve(const LightCurve& light_curve, const Supernova& supernova,
                              const PreparedTemplate& prepared, const PassbandCatalogue& catalogue,
                              const Extinction& dust, const FitOptions& options = {});

/// Fits of many supernovae, and those that could not be fitted at all.
struct LightCurveFits {
  std::vector<LightCurveFit> fits;  ///< In the order of the light curves.
  std::vector<SetAside> set_aside;
};

/// Fits every light curve with the supernova of the same name and survey, on `threads` threads (0: all cores). The
/// result does not depend on their number. Light curves without a supernova, a usable redshift or reddening, or a
/// single usable epoch are set aside with the reason.
/// @param progress to advance by one a light curve; a line of its own on the terminal if there is none.
LightCurveFits fit_all(std::span<const LightCurve> light_curves, std::span<const Supernova> supernovae,
                       const PreparedTemplate& prepared, const PassbandCatalogue& catalogue, const Extinction& dust,
                       const FitOptions& options = {}, int threads = 0, Progress* progress = nullptr);

}  // namespace thirdrung
