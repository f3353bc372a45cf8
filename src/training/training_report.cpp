#include "training/training_report.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "base/atomic_file.h"
#include "light/dust_law.h"
#include "template/rest_band.h"
#include "training/training_figures.h"

namespace thirdrung {

namespace {

std::string table_of(std::span<const ResidualBin> bins, const std::string& what) {
  std::string out = fmt::format(
      "| {} | points | supernovae | data − template [mmag] | mean pull | χ² per degree of freedom | width of pulls |\n"
      "|---|---:|---:|---:|---:|---:|---:|\n",
      what);
  for (const ResidualBin& bin : bins) {
    out += fmt::format("| {} | {} | {} | {:+.1f} ± {:.1f} | {:+.3f} ± {:.3f} | {:.2f} ± {:.2f} | {:.2f} |\n", bin.name,
                       bin.points, bin.supernovae, 1e3 * bin.offset, 1e3 * bin.offset_error, bin.mean_pull,
                       bin.mean_pull_error, bin.chi2_per_dof, bin.chi2_per_dof_error, bin.width);
  }
  return out + "\n";
}

/// Names the bins whose χ² per degree of freedom is outside 1 ± 0.1 by more than three of its errors.
std::string chi2_sentence(std::span<const ResidualBin> bins, const std::string& along) {
  std::string found;
  for (const ResidualBin& bin : bins) {
    const double beyond = std::abs(bin.chi2_per_dof - 1) - 0.1;
    if (bin.supernovae < 5 || beyond <= 3 * bin.chi2_per_dof_error) continue;
    found += fmt::format("{}{} ({:.2f})", found.empty() ? "" : ", ", bin.name, bin.chi2_per_dof);
  }
  if (found.empty()) return fmt::format("By {}, no χ² per degree of freedom leaves 1 ± 0.1 by more than 3 σ.", along);
  return fmt::format("**By {}, χ² per degree of freedom leaves 1 ± 0.1 by more than 3 σ in: {}.**", along, found);
}

std::string figure(const std::string& file, const std::string& caption) {
  std::string alternative = file;
  std::replace(alternative.begin(), alternative.end(), '-', ' ');
  return fmt::format("![{}]({}.svg)\n\n*{}*\n\n", alternative, file, caption);
}

std::string summary_text(const TrainingResult& result) {
  const auto& supernovae = result.selection.supernovae;
  const SpectralTemplate& model = result.state.model;
  std::size_t epochs = 0;
  std::map<std::string, int> surveys;
  for (const TrainingSupernova& sn : supernovae) {
    epochs += sn.epochs.size();
    ++surveys[sn.survey];
  }
  std::string list;
  for (const auto& [survey, count] : surveys) list += fmt::format("{}{} {}", list.empty() ? "" : ", ", survey, count);
  std::string out =
      fmt::format("Trained on {} supernovae ({}), {} epochs and {} spectra; {} supernovae were left out.\n\n",
                  supernovae.size(), list, epochs, result.state.spectra.size(), result.selection.left_out.size());
  out += fmt::format(
      "| fiducial supernova (s = 1, c = 0) | |\n|---|---:|\n| B − V at B maximum | {:+.3f} mag |\n| Δm15(B) | {:.3f} "
      "mag |\n"
      "| Δm15(B) at s = 0.8, 1.2 | {:.3f}, {:.3f} mag |\n| largest error of the gauge | {:.1e} |\n\n"
      "Population of the training set, by maximum likelihood: s {:.3f} ± {:.3f}, c {:+.3f} ± {:.3f} mag.\n\n",
      model.b_magnitude(0) - model.v_magnitude(0), model.dm15_b(1), model.dm15_b(0.8), model.dm15_b(1.2),
      gauge_errors(model).largest(), result.population.s.mean, result.population.s.width, result.population.c.mean,
      result.population.c.width);
  for (const std::string& warning : result.warnings) out += fmt::format("**Caution.** {}\n\n", warning);
  return out;
}

std::string colour_law_text(const TrainingResult& result) {
  const SpectralTemplate& model = result.state.model;
  const Extinction steep(DustLaw::fitzpatrick99, 2.0), usual(DustLaw::fitzpatrick99, 3.1);
  std::string out = "| wavelength [Å] | K | K of R_V = 2 | K of R_V = 3.1 |\n|---:|---:|---:|---:|\n";
  for (const double wave : {3000.0, 3600.0, 4000.0, 4400.0, 5000.0, 5500.0, 6000.0, 7000.0, 8000.0, 9000.0}) {
    out += fmt::format("| {:.0f} | {:+.3f} | {:+.3f} | {:+.3f} |\n", wave, model.colour(wave),
                       reddening_as_colour(steep, model, wave), reddening_as_colour(usual, model, wave));
  }
  return out + "\n";
}

std::string residual_text(std::span<const HeldOutPoint> points) {
  std::set<std::size_t> supernovae;
  for (const HeldOutPoint& point : points) supernovae.insert(point.supernova);
  std::string out = fmt::format(
      "Every training supernova was fitted with a template trained without it and its fold: {} points of {} supernovae "
      "with a trusted fit. Offsets are weighted means of data − template, positive where the data are fainter; errors "
      "treat the epochs of one supernova as one draw. χ² per degree of freedom is Σ pull² over what is "
      "expected of it, which is less than one a point by what the fit of four parameters takes out there; the width is "
      "half the range of the middle 68% of the pulls, blind to wild epochs. The fit of m_B, s and c takes a mean "
      "offset out of every supernova: what is left are differences between bands and phases.\n\n",
      points.size(), supernovae.size());
  out += figure("residuals",
                "Held-out residuals by passband, phase and redshift; grey: χ² per degree of freedom 1 ± 0.1.");
  out += figure("residual-map", "Mean held-out pull over phase and rest wavelength, with χ² per degree of freedom.");
  const auto by_survey = bins_by(points, [](const HeldOutPoint& p) { return p.survey; });
  const auto by_band = bins_by(points, [](const HeldOutPoint& p) { return p.survey + " " + p.passband; });
  const std::vector<double> phases = phase_bin_edges(), redshifts = redshift_bin_edges();
  const auto by_phase = bins_by(
      points, [](const HeldOutPoint& p) { return p.phase; }, phases, "d");
  out += "### By survey\n\n" + table_of(by_survey, "survey") + offset_sentence(by_survey, "survey") + " " +
         chi2_sentence(by_survey, "survey") + "\n\n";
  out += "### By passband\n\n" + table_of(by_band, "passband") + offset_sentence(by_band, "passband") + " " +
         chi2_sentence(by_band, "passband") + "\n\n";
  out += "### By phase\n\n" + table_of(by_phase, "phase") + offset_sentence(by_phase, "phase") + " " +
         chi2_sentence(by_phase, "phase") + "\n\n### By redshift\n\n";
  for (const WavelengthZone& zone : wavelength_zones()) {
    const auto inside = in_zone(points, zone);
    const auto bins = bins_by(
        inside, [](const HeldOutPoint& p) { return p.z; }, redshifts, "");
    if (bins.empty()) continue;
    out += table_of(bins, "redshift, bands " + zone.name) + offset_sentence(bins, "redshift in bands " + zone.name);
    const Slope slope = slope_of(bins);
    if (slope.error > 0) {
      const bool trend = std::abs(slope.value) > 3 * slope.error;
      out += fmt::format(" {}Slope with redshift: {:+.1f} ± {:.1f} mmag per 0.1{}.{}", trend ? "**" : "",
                         100 * slope.value, 100 * slope.error, trend ? ", beyond 3 σ" : "", trend ? "**" : "");
    }
    out += "\n\n";
  }
  return out;
}

std::string offsets_text(std::span<const ZeroPointOffset> offsets) {
  std::string out =
      "Shift to be added to the tabulated magnitudes that would fit best, all passbands together, the template held. A "
      "shift common to a survey goes into m_B and a trend with wavelength into c: there a prior of 0.1 mag about zero "
      "decides, and these two directions make up most of the errors given. Shifts of one passband against its "
      "neighbours show better in the held-out residuals.\n\n";
  out += figure("zero-points", "Zero-point offsets that the light curves would prefer.");
  out += "| survey | passband | offset [mmag] | supernovae |\n|---|---|---:|---:|\n";
  std::string beyond;
  for (const ZeroPointOffset& o : offsets) {
    out += fmt::format("| {} | {} | {:+.1f} ± {:.1f} | {} |\n", o.survey, o.passband, 1e3 * o.offset, 1e3 * o.error,
                       o.supernovae);
    if (std::abs(o.offset) > 3 * o.error)
      beyond += fmt::format("{}{} {}", beyond.empty() ? "" : ", ", o.survey, o.passband);
  }
  return out + (beyond.empty() ? "\nNone is beyond 3 σ.\n\n" : fmt::format("\n**Beyond 3 σ: {}.**\n\n", beyond));
}

/// @param advice what to do about a factor that is far from one.
std::string error_factors_text(std::span<const ErrorFactor> factors, const std::string& advice) {
  std::string out = "| survey | passband | factor | supernovae | epochs |\n|---|---|---:|---:|---:|\n";
  std::string beyond;
  for (const ErrorFactor& f : factors) {
    out += fmt::format("| {} | {} | {:.2f} ± {:.2f} | {} | {} |\n", f.survey, f.passband, f.factor, f.error,
                       f.supernovae, f.epochs);
    if (std::abs(f.factor - 1) > std::max(0.1, 3 * f.error))
      beyond += fmt::format("{}{} {}", beyond.empty() ? "" : ", ", f.survey, f.passband);
  }
  return out + (beyond.empty() ? "\nNone is off 1 by more than a tenth and 3 σ.\n\n"
                               : fmt::format("\n**Off 1 by more than a tenth and 3 σ: {}.** {}\n\n", beyond, advice));
}

double median_of(std::vector<double> values) {
  if (values.empty()) return 0;
  std::sort(values.begin(), values.end());
  return values[values.size() / 2];
}

/// Surveys that had no part in the training: medians, because a few peculiar supernovae would rule a mean.
std::string check_text(const CheckFits& check) {
  struct Survey {
    std::vector<double> as_given, with_offsets, with_factors;
    int trusted = 0, fits = 0;
  };
  std::map<std::string, Survey> surveys;
  const auto each = [&](const LightCurveFits& fits, const auto& visit) {
    for (const LightCurveFit& fit : fits.fits) visit(surveys[fit.survey], fit);
  };
  each(check.as_given, [](Survey& survey, const LightCurveFit& fit) {
    ++survey.fits;
    if (fit.dof > 0) survey.as_given.push_back(fit.chi2 / fit.dof);
  });
  each(check.with_offsets, [](Survey& survey, const LightCurveFit& fit) {
    if (fit.trusted()) ++survey.trusted;
    if (fit.dof > 0) survey.with_offsets.push_back(fit.chi2 / fit.dof);
  });
  each(check.with_factors, [](Survey& survey, const LightCurveFit& fit) {
    if (fit.dof > 0) survey.with_factors.push_back(fit.chi2 / fit.dof);
  });
  std::string out =
      "Fitted with the finished template, as given, after the zero-point offsets that they prefer, and with the "
      "factors on their errors that they prefer (found from the same light curves).\n\n"
      "| survey | fits | trusted, with offsets | median χ² per degree of freedom, as given | with offsets | with "
      "factors too |\n"
      "|---|---:|---:|---:|---:|---:|\n";
  for (const auto& [name, survey] : surveys) {
    out += fmt::format("| {} | {} | {} | {:.2f} | {:.2f} | {:.2f} |\n", name, survey.fits, survey.trusted,
                       median_of(survey.as_given), median_of(survey.with_offsets), median_of(survey.with_factors));
  }
  out += "\n| survey | passband | offset [mmag] | supernovae |\n|---|---|---:|---:|\n";
  for (const ZeroPointOffset& o : check.offsets) {
    out += fmt::format("| {} | {} | {:+.1f} ± {:.1f} | {} |\n", o.survey, o.passband, 1e3 * o.offset, 1e3 * o.error,
                       o.supernovae);
  }
  out += "\nFactors on the measured errors that would suit best after that, the template's scatter held:\n\n";
  return out + error_factors_text(check.error_factors, "Multiply their `error_scale` in a run file by it.");
}

/// A reason without its figures, so that like reasons are counted together.
std::string reason_kind(const std::string& reason) {
  if (reason.starts_with("peculiar")) return "peculiar";
  const std::size_t digit = reason.find_first_of("0123456789+");
  std::string kind = reason.substr(0, digit == 0 ? std::string::npos : digit);
  if (kind.starts_with("fewer than")) kind = reason;
  if (digit == 0 && reason.find("epochs between") != std::string::npos)
    kind = reason.substr(reason.find("epochs between"));
  while (!kind.empty() && (kind.back() == ' ' || kind.back() == '-')) kind.pop_back();
  return kind;
}

std::string left_out_text(std::span<const SetAside> left_out) {
  if (left_out.empty()) return "Nobody.\n";
  std::map<std::string, std::vector<const SetAside*>> by_reason;
  for (const SetAside& row : left_out) by_reason[reason_kind(row.reason)].push_back(&row);
  std::string out;
  for (const auto& [kind, rows] : by_reason) {
    out += fmt::format("**{}** ({}): ", kind, rows.size());
    for (std::size_t i = 0; i < rows.size(); ++i) {
      out += fmt::format("{}{} ({}{})", i ? ", " : "", rows[i]->supernova, rows[i]->survey,
                         rows[i]->reason == kind ? "" : "; " + rows[i]->reason);
    }
    out += "\n\n";
  }
  return out;
}

}  // namespace

std::string training_report_text(const TrainingResult& result, std::span<const LightCurve> light_curves) {
  std::string out = fmt::format("# Training of {}\n\n", result.trained.model.name);
  out += summary_text(result);
  out += "## Light curves\n\n";
  out += figure(
      "light-curves",
      "Fiducial light curves (black, with the 1σ error of the training) and their change with s (above) and c "
      "(below), against rest-frame phase, each relative to the fiducial supernova at B maximum. B and V: the gauge "
      "(Bessell, Vega); U, R, I: photon-counting top hats 3300–4000, 5800–7200, 7200–8800 Å.");
  out += "## Spectra\n\n";
  out += figure(
      "spectra",
      "Fiducial spectra at eight phases, shifted by equal steps, with the 1σ error, over the wavelengths that are used "
      "and where the error is below 0.5.");
  out += "## Colour law\n\n";
  out += figure(
      "colour-law",
      "K (blue, with the 1σ error) beside the reddening of Fitzpatrick (1999) in the same normalisation: mean 0 over "
      "B, −1 over V.");
  out += colour_law_text(result);
  out += "## Scatter and stretch response\n\n";
  out += figure("scatter", "ε in per cent, κ, and Γ averaged over five bands.");
  const std::vector<HeldOutPoint> points = held_out_points(result, light_curves);
  if (!points.empty()) out += "## Residuals of held-out supernovae\n\n" + residual_text(points);
  if (!result.cross_validation.points.empty()) {
    out += "## Cross-validation\n\n";
    out += figure("cross-validation",
                  "−ln of the predictive likelihood of held-out supernovae above the best, against the strength of the "
                  "smoothing. Blue: an improvement of more than 0.5 when tried; grey: not; dashed: chosen.");
  }
  if (!result.offsets.empty()) out += "## Zero points\n\n" + offsets_text(result.offsets);
  if (!result.error_factors.empty()) {
    out += "## Measured errors\n\n";
    out +=
        "Factor that the measured errors, as they were used (`error_scale` and error floor included), should be "
        "multiplied by: by restricted maximum likelihood together with ε and κ, all passbands at once. Errors that "
        "leave something out show in epochs of which the "
        "measured error exceeds the template's own scatter.\n\n";
    out += error_factors_text(result.error_factors,
                              "Multiply the survey's `error_scale` in the training file by it, and train again.");
  }
  if (!result.check.as_given.fits.empty()) out += "## Surveys not trained on\n\n" + check_text(result.check);
  out += "## Left out\n\n" + left_out_text(result.selection.left_out);
  if (!result.spectra_left_out.empty()) {
    out += fmt::format("\nSpectra left out: {}.\n", fmt::join(result.spectra_left_out, "; "));
  }
  return out;
}

void write_training_report(const TrainingResult& result, std::span<const LightCurve> light_curves,
                           const std::filesystem::path& folder) {
  std::filesystem::create_directories(folder);
  light_curve_figure(result).write(folder / "light-curves.svg");
  spectra_figure(result).write(folder / "spectra.svg");
  colour_law_figure(result).write(folder / "colour-law.svg");
  scatter_figure(result).write(folder / "scatter.svg");
  const std::vector<HeldOutPoint> points = held_out_points(result, light_curves);
  if (!points.empty()) {
    residual_figure(points).write(folder / "residuals.svg");
    residual_map_figure(points).write(folder / "residual-map.svg");
  }
  if (!result.cross_validation.points.empty()) {
    cross_validation_figure(result.cross_validation).write(folder / "cross-validation.svg");
  }
  if (!result.offsets.empty()) offsets_figure(result.offsets).write(folder / "zero-points.svg");
  write_file_atomically(folder / "training-report.md", training_report_text(result, light_curves));
}

}  // namespace thirdrung
