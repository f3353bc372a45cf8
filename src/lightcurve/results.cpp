#include "lightcurve/results.h"

#include <cmath>
#include <map>
#include <stdexcept>

namespace thirdrung {

namespace {

std::string joined(const std::vector<std::string>& words) {
  std::string out;
  for (const std::string& word : words) out += (out.empty() ? "" : ",") + word;
  return out;
}

std::string joined(const std::vector<BandLeftOut>& bands) {
  std::string out;
  for (const BandLeftOut& band : bands) out += (out.empty() ? "" : "; ") + band.passband + ": " + band.reason;
  return out;
}

/// One real column from a member of every fit.
template <typename Get>
std::vector<double> each(std::span<const LightCurveFit> fits, Get get) {
  std::vector<double> out;
  out.reserve(fits.size());
  for (const LightCurveFit& fit : fits) out.push_back(get(fit));
  return out;
}

template <typename Get>
std::vector<std::string> each_text(std::span<const LightCurveFit> fits, Get get) {
  std::vector<std::string> out;
  out.reserve(fits.size());
  for (const LightCurveFit& fit : fits) out.push_back(get(fit));
  return out;
}

template <typename Get>
std::vector<std::int64_t> each_integer(std::span<const LightCurveFit> fits, Get get) {
  std::vector<std::int64_t> out;
  out.reserve(fits.size());
  for (const LightCurveFit& fit : fits) out.push_back(get(fit));
  return out;
}

/// The light curve of every fit.
std::vector<const LightCurve*> matched(std::span<const LightCurveFit> fits, std::span<const LightCurve> light_curves) {
  std::map<std::pair<std::string, std::string>, const LightCurve*> by_name;
  for (const LightCurve& one : light_curves) by_name.try_emplace({one.survey, one.supernova}, &one);
  std::vector<const LightCurve*> out;
  for (const LightCurveFit& fit : fits) {
    const auto found = by_name.find({fit.survey, fit.supernova});
    if (found == by_name.end()) throw std::logic_error("a fit without its light curve: " + fit.supernova);
    out.push_back(found->second);
  }
  return out;
}

}  // namespace

Table fits_table(std::span<const LightCurveFit> fits) {
  Table table;
  const auto reals = [&](const char* name, const char* unit, const char* description, auto get) {
    table.add_reals(name, each(fits, get), unit, description);
  };
  const auto error = [&](const char* name, const char* unit, Eigen::Index k) {
    reals(name, unit, "1 sigma", [k](const LightCurveFit& fit) { return std::sqrt(fit.covariance(k, k)); });
  };
  const auto covariance = [&](const char* name, const char* unit, Eigen::Index i, Eigen::Index k) {
    reals(name, unit, "covariance", [i, k](const LightCurveFit& fit) { return fit.covariance(i, k); });
  };
  using Fit = LightCurveFit;
  table.add_strings("supernova", each_text(fits, [](const Fit& fit) { return fit.supernova; }));
  table.add_strings("survey", each_text(fits, [](const Fit& fit) { return fit.survey; }));
  reals("z_helio", "", "heliocentric redshift", [](const Fit& fit) { return fit.z_helio; });
  reals("t_0", "d", "date of the template's B maximum", [](const Fit& fit) { return fit.t_0; });
  error("t_0_error", "d", 0);
  reals("m_b", "mag", "rest-frame B magnitude at maximum", [](const Fit& fit) { return fit.m_b; });
  error("m_b_error", "mag", 1);
  reals("s", "", "stretch", [](const Fit& fit) { return fit.s; });
  error("s_error", "", 2);
  reals("c", "mag", "colour", [](const Fit& fit) { return fit.c; });
  error("c_error", "mag", 3);
  covariance("cov_t0_mb", "d mag", 0, 1);
  covariance("cov_t0_s", "d", 0, 2);
  covariance("cov_t0_c", "d mag", 0, 3);
  covariance("cov_mb_s", "mag", 1, 2);
  covariance("cov_mb_c", "mag2", 1, 3);
  covariance("cov_s_c", "mag", 2, 3);
  reals("chi2", "", "of the epochs used, with the template's scatter", [](const Fit& fit) { return fit.chi2; });
  table.add_integers("dof", each_integer(fits, [](const Fit& fit) { return fit.dof; }), "", "degrees of freedom");
  reals("fit_probability", "", "chance of a larger chi2", [](const Fit& fit) { return fit.fit_probability; });
  table.add_strings("bands_used", each_text(fits, [](const Fit& fit) { return joined(fit.bands_used); }),
                    "passbands fitted, from blue to red");
  table.add_integers("epochs_used", each_integer(fits, [](const Fit& fit) { return fit.epochs_used; }), "",
                     "epochs fitted, without the mistrusted ones");
  reals("first_phase", "d", "rest-frame phase of the first epoch used", [](const Fit& fit) { return fit.first_phase; });
  reals("last_phase", "d", "rest-frame phase of the last epoch used", [](const Fit& fit) { return fit.last_phase; });
  reals("dm15_b", "mag", "decline of rest-frame B in the 15 d after maximum",
        [](const Fit& fit) { return fit.dm15_b; });
  table.add_strings("bands_left_out", each_text(fits, [](const Fit& fit) { return joined(fit.bands_left_out); }),
                    "passband: why it was not fitted");
  table.add_integers("mistrusted_epochs", each_integer(fits, [](const Fit& fit) { return fit.mistrusted_epochs(); }),
                     "", "epochs that the robust loss gave little weight");
  std::vector<bool> trusted;
  for (const Fit& fit : fits) trusted.push_back(fit.trusted());
  table.add_flags("trusted", std::move(trusted), "no remark speaks against the fit");
  table.add_strings("remarks", each_text(fits, [](const Fit& fit) { return text_of(fit.remarks); }));
  return table;
}

Table points_table(std::span<const LightCurveFit> fits, std::span<const LightCurve> light_curves) {
  std::vector<std::string> supernova, survey, passband;
  std::vector<double> mjd, phase, flux, flux_error, model_flux, model_error, pull, weight;
  std::vector<bool> mistrusted;
  const auto sources = matched(fits, light_curves);
  for (std::size_t i = 0; i < fits.size(); ++i) {
    for (const FittedEpoch& point : fits[i].epochs) {
      const Epoch& epoch = sources[i]->epochs[point.epoch];
      supernova.push_back(fits[i].supernova);
      survey.push_back(fits[i].survey);
      passband.push_back(sources[i]->passbands[epoch.passband]);
      mjd.push_back(epoch.mjd);
      phase.push_back(point.phase);
      flux.push_back(epoch.flux);
      flux_error.push_back(epoch.flux_error);
      model_flux.push_back(point.model_flux);
      model_error.push_back(point.model_error);
      pull.push_back(point.pull);
      weight.push_back(point.weight);
      mistrusted.push_back(point.mistrusted);
    }
  }
  Table table;
  table.add_strings("supernova", std::move(supernova));
  table.add_strings("survey", std::move(survey));
  table.add_strings("passband", std::move(passband));
  table.add_reals("mjd", std::move(mjd), "d");
  table.add_reals("phase", std::move(phase), "d", "rest frame, from t_0");
  table.add_reals("flux", std::move(flux), "uJy", "AB scale");
  table.add_reals("flux_error", std::move(flux_error), "uJy");
  table.add_reals("model_flux", std::move(model_flux), "uJy");
  table.add_reals("model_error", std::move(model_error), "uJy", "scatter of supernovae about the template");
  table.add_reals("pull", std::move(pull), "", "(flux - model) over both errors");
  table.add_reals("weight", std::move(weight), "", "of the robust loss");
  table.add_flags("mistrusted", std::move(mistrusted));
  return table;
}

Table curves_table(std::span<const LightCurveFit> fits, std::span<const LightCurve> light_curves) {
  std::vector<std::string> supernova, survey, passband;
  std::vector<double> phase, mjd, model_flux, model_error;
  const auto sources = matched(fits, light_curves);
  for (std::size_t i = 0; i < fits.size(); ++i) {
    for (const CurvePoint& point : fits[i].curves) {
      supernova.push_back(fits[i].supernova);
      survey.push_back(fits[i].survey);
      passband.push_back(sources[i]->passbands[point.passband]);
      phase.push_back(point.phase);
      mjd.push_back(point.mjd);
      model_flux.push_back(point.model_flux);
      model_error.push_back(point.model_error);
    }
  }
  Table table;
  table.add_strings("supernova", std::move(supernova));
  table.add_strings("survey", std::move(survey));
  table.add_strings("passband", std::move(passband));
  table.add_reals("phase", std::move(phase), "d", "rest frame, from t_0");
  table.add_reals("mjd", std::move(mjd), "d");
  table.add_reals("model_flux", std::move(model_flux), "uJy", "AB scale");
  table.add_reals("model_error", std::move(model_error), "uJy", "scatter of supernovae about the template");
  return table;
}

}  // namespace thirdrung
