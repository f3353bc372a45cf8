#include "pipeline/sample_stage.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "base/chi_square.h"
#include "base/error.h"
#include "lightcurve/results.h"
#include "pipeline/calibrators.h"
#include "pipeline/inputs.h"
#include "pipeline/table_tools.h"
#include "sky/position.h"
#include "standardisation/datum.h"

namespace thirdrung {

namespace {

/// One supernova: what all its surveys say together.
struct Member {
  const Supernova* supernova = nullptr;  ///< Of the first survey that lists it; null if none does.
  std::vector<const FittedSupernova*> fits;
  StandardisationDatum datum;
  double agreement = 1.0;  ///< Chance of surveys disagreeing as much.
  double t_0 = missing_value, t_0_error = missing_value;
  double chi2 = 0.0, first_phase = missing_value, last_phase = missing_value;
  int dof = 0, epochs = 0;
  std::vector<std::string> bands;
  bool trusted = false;
  std::string remarks;
  Redshifts redshifts;
  std::string unusable;  ///< Why the rules are not even asked.
  bool calibrator = false;
};

StandardisationDatum datum_of(const FittedSupernova& one) {
  StandardisationDatum datum;
  datum.name = one.fit.supernova;
  datum.surveys = {one.fit.survey};
  datum.m_b = one.fit.m_b;
  datum.s = one.fit.s;
  datum.c = one.fit.c;
  datum.covariance = one.fit.covariance.bottomRightCorner<3, 3>();
  return datum;
}

void add_remark(std::string& remarks, const std::string& more) {
  if (!more.empty()) remarks += (remarks.empty() ? "" : "; ") + more;
}

/// Fits of one supernova, in order of first appearance in the table.
std::vector<Member> grouped(const std::vector<FittedSupernova>& fits) {
  std::vector<Member> members;
  std::map<std::string, std::size_t> index;
  for (const FittedSupernova& one : fits) {
    const auto [found, fresh] = index.emplace(one.fit.supernova, members.size());
    if (fresh) members.emplace_back();
    members[found->second].fits.push_back(&one);
  }
  return members;
}

void combine_fits(Member& member) {
  const bool any_trusted =
      std::any_of(member.fits.begin(), member.fits.end(), [](const auto* f) { return f->trusted; });
  std::vector<StandardisationDatum> rows;
  double best_error = INFINITY;
  for (const FittedSupernova* one : member.fits) {
    const LightCurveFit& fit = one->fit;
    const std::string whose = member.fits.size() > 1 ? fit.survey + ": " : std::string();
    if (!one->remarks.empty()) add_remark(member.remarks, whose + one->remarks);
    if (any_trusted && !one->trusted) {
      add_remark(member.remarks, fmt::format("the fit of {} is not trusted and left out", fit.survey));
      continue;
    }
    rows.push_back(datum_of(*one));
    member.chi2 += fit.chi2;
    member.dof += fit.dof;
    member.epochs += fit.epochs_used;
    for (const std::string& band : fit.bands_used) {
      if (std::find(member.bands.begin(), member.bands.end(), band) == member.bands.end()) member.bands.push_back(band);
    }
    member.first_phase = std::fmin(member.first_phase, fit.first_phase);
    member.last_phase = std::fmax(member.last_phase, fit.last_phase);
    const double error = std::sqrt(fit.covariance(0, 0));
    if (error < best_error) best_error = member.t_0_error = error, member.t_0 = fit.t_0;
  }
  member.trusted = any_trusted;
  const CombinedDatum combined = combine_surveys(rows).front();
  member.datum = combined.datum;
  member.agreement = combined.disagreement_probability;
}

void add_redshifts(std::vector<Member>& members, const std::vector<Supernova>& supernovae,
                   const RedshiftOptions& options) {
  std::map<std::string, const Supernova*> by_name;
  for (const Supernova& one : supernovae) by_name.emplace(one.name, &one);
  std::vector<Supernova> listed;
  std::vector<Member*> owners;
  for (Member& member : members) {
    const auto found = by_name.find(member.datum.name);
    if (found == by_name.end()) {
      member.unusable = "not in the supernova table of any survey";
      continue;
    }
    member.supernova = found->second;
    listed.push_back(*found->second);
    owners.push_back(&member);
  }
  if (listed.empty()) throw NoResultError("No fitted supernova stands in the supernova table of any survey.");
  const RedshiftResult result = redshifts_of_sample(listed, options);
  for (std::size_t i = 0; i < owners.size(); ++i) {
    owners[i]->redshifts = result.redshifts[i];
    add_remark(owners[i]->remarks, result.redshifts[i].remarks);
    if (!(result.redshifts[i].z_flow > 0)) owners[i]->unusable = "flow redshift is not positive";
  }
}

CutSubject subject_of(const Member& member) {
  CutSubject out;
  out.supernova = member.datum.name;
  out.survey = joined_list(member.datum.surveys, ",");
  out.s = member.datum.s;
  out.c = member.datum.c;
  out.t_0_error = member.t_0_error;
  out.m_b_error = std::sqrt(member.datum.covariance(0, 0));
  out.s_error = std::sqrt(member.datum.covariance(1, 1));
  out.c_error = std::sqrt(member.datum.covariance(2, 2));
  out.first_phase = member.first_phase;
  out.last_phase = member.last_phase;
  out.mw_ebv = member.supernova ? member.supernova->mw_ebv : missing_value;
  out.z_flow = member.redshifts.z_flow;
  out.fit_probability = chi_square_survival(member.chi2, member.dof);
  out.bands = static_cast<int>(member.bands.size());
  out.epochs = member.epochs;
  out.trusted = member.trusted;
  out.host_log_mass = member.supernova ? member.supernova->host_log_mass : missing_value;
  return out;
}

/// Adds columns member by member.
class SampleWriter {
 public:
  explicit SampleWriter(const std::vector<Member>& members) : members_(members) {}

  template <typename Get>
  void reals(const char* name, const char* unit, const char* description, Get get) {
    std::vector<double> values;
    for (const Member& member : members_) values.push_back(get(member));
    table.add_reals(name, std::move(values), unit, description);
  }
  template <typename Get>
  void texts(const char* name, const char* description, Get get) {
    std::vector<std::string> values;
    for (const Member& member : members_) values.push_back(get(member));
    table.add_strings(name, std::move(values), description);
  }
  template <typename Get>
  void integers(const char* name, const char* description, Get get) {
    std::vector<std::int64_t> values;
    for (const Member& member : members_) values.push_back(get(member));
    table.add_integers(name, std::move(values), "", description);
  }
  /// A number of the supernova table.
  void listed(const char* name, const char* unit, const char* description, double Supernova::*value) {
    reals(name, unit, description,
          [value](const Member& m) { return m.supernova ? m.supernova->*value : missing_value; });
  }

  Table table;

 private:
  const std::vector<Member>& members_;
};

void write_place(SampleWriter& out) {
  out.listed("ra", "deg", "ICRS", &Supernova::ra);
  out.listed("dec", "deg", "ICRS", &Supernova::dec);
  const auto galactic = [](const Member& m) {
    return m.supernova ? galactic_from_icrs(m.supernova->ra, m.supernova->dec) : Galactic{missing_value, missing_value};
  };
  out.reals("gal_l", "deg", "Galactic longitude", [&](const Member& m) { return galactic(m).l; });
  out.reals("gal_b", "deg", "Galactic latitude", [&](const Member& m) { return galactic(m).b; });
  out.listed("z_helio", "", "heliocentric redshift of the host", &Supernova::z_helio);
  out.listed("z_helio_error", "", "1 sigma", &Supernova::z_helio_error);
  out.reals("z_cmb", "", "in the frame of the CMB, of the group where one is used",
            [](const Member& m) { return m.redshifts.z_cmb; });
  out.reals("v_pec", "km / s", "peculiar velocity taken off", [](const Member& m) { return m.redshifts.v_pec; });
  out.reals("z_flow", "", "redshift of the smooth expansion", [](const Member& m) { return m.redshifts.z_flow; });
  out.reals("z_flow_error", "", "redshift error and velocity scatter",
            [](const Member& m) { return m.redshifts.z_flow_error; });
  out.listed("mw_ebv", "mag", "Milky Way reddening", &Supernova::mw_ebv);
}

void write_host(SampleWriter& out, const HostMassOptions& mass) {
  out.listed("host_log_mass", "dex", "log10 of the host's stellar mass", &Supernova::host_log_mass);
  out.listed("host_log_mass_error", "dex", "1 sigma", &Supernova::host_log_mass_error);
  out.reals("host_mass_probability", "", "that the mass is above the step", [&](const Member& m) {
    return m.supernova ? host_mass_probability(m.supernova->host_log_mass, m.supernova->host_log_mass_error, mass)
                       : mass.probability_when_absent;
  });
}

void write_fit(SampleWriter& out, const std::vector<CutSubject>& subjects) {
  using M = const Member&;
  out.reals("t_0", "d", "date of B maximum", [](M m) { return m.t_0; });
  out.reals("t_0_error", "d", "1 sigma", [](M m) { return m.t_0_error; });
  out.reals("m_b", "mag", "rest-frame B magnitude at maximum", [](M m) { return m.datum.m_b; });
  out.reals("m_b_error", "mag", "1 sigma", [](M m) { return std::sqrt(m.datum.covariance(0, 0)); });
  out.reals("s", "", "stretch", [](M m) { return m.datum.s; });
  out.reals("s_error", "", "1 sigma", [](M m) { return std::sqrt(m.datum.covariance(1, 1)); });
  out.reals("c", "mag", "colour", [](M m) { return m.datum.c; });
  out.reals("c_error", "mag", "1 sigma", [](M m) { return std::sqrt(m.datum.covariance(2, 2)); });
  out.reals("cov_mb_s", "mag", "covariance", [](M m) { return m.datum.covariance(0, 1); });
  out.reals("cov_mb_c", "mag2", "covariance", [](M m) { return m.datum.covariance(0, 2); });
  out.reals("cov_s_c", "mag", "covariance", [](M m) { return m.datum.covariance(1, 2); });
  out.reals("chi2", "", "of the light curves", [](M m) { return m.chi2; });
  out.integers("dof", "degrees of freedom", [](M m) { return m.dof; });
  std::size_t i = 0;
  out.reals("fit_probability", "", "chance of a larger chi2", [&](M) { return subjects[i++].fit_probability; });
  out.reals("first_phase", "d", "of the first epoch used", [](M m) { return m.first_phase; });
  out.reals("last_phase", "d", "of the last epoch used", [](M m) { return m.last_phase; });
  out.integers("bands", "passbands fitted", [](M m) { return static_cast<std::int64_t>(m.bands.size()); });
  out.integers("epochs", "epochs fitted", [](M m) { return m.epochs; });
  std::vector<bool> trusted;
  trusted.reserve(subjects.size());
  for (const CutSubject& one : subjects) trusted.push_back(one.trusted);
  out.table.add_flags("trusted", std::move(trusted), "no remark speaks against the fit");
  out.reals("surveys_agree", "", "chance that surveys differ as much in m_b, s, c", [](M m) { return m.agreement; });
}

void write_rules(SampleWriter& out, const std::vector<Member>& members, const CutResult& cuts) {
  std::vector<bool> used, calibrator;
  std::vector<std::string> first, all;
  for (std::size_t i = 0; i < members.size(); ++i) {
    calibrator.push_back(members[i].calibrator);
    const std::string& unusable = members[i].unusable;
    used.push_back(unusable.empty() && cuts.used[i]);
    first.push_back(unusable.empty() ? cuts.first_rule(i) : unusable);
    all.push_back(unusable.empty() ? cuts.all_rules(i) : unusable);
  }
  out.table.add_flags("used", std::move(used), "in the intercept");
  out.table.add_strings("removed_by", std::move(first), "first rule that removes it");
  out.table.add_strings("removed_by_all", std::move(all), "every rule that removes it");
  if (std::find(calibrator.begin(), calibrator.end(), true) != calibrator.end())
    out.table.add_flags("calibrator", std::move(calibrator), "its host has a known distance; not in the Hubble flow");
  out.texts("remarks", "", [](const Member& m) { return m.remarks; });
}

}  // namespace

SampleTables make_sample(const RunFile& run, const Table& fits) {
  return make_sample(run, fits, read_all_supernovae(run).supernovae, read_redshift_options(run), calibrator_names(run));
}

SampleTables make_sample(const RunFile& run, const Table& fits, const std::vector<Supernova>& supernovae,
                         const RedshiftOptions& redshifts, const std::set<std::string>& calibrators) {
  std::vector<FittedSupernova> fitted = read_fits(fits);
  std::erase_if(fitted, [](const FittedSupernova& one) { return !std::isfinite(one.fit.m_b); });
  std::vector<Member> members = grouped(fitted);
  for (Member& member : members) combine_fits(member);
  add_redshifts(members, supernovae, redshifts);
  std::vector<CutSubject> subjects, flow;
  for (Member& member : members) {
    member.calibrator = calibrators.contains(member.datum.name);
    if (member.calibrator) member.unusable = "calibrator";
    subjects.push_back(subject_of(member));
    if (!member.calibrator) flow.push_back(subjects.back());
  }
  const CutResult cuts = apply_cuts(subjects, cut_rules(run.cuts));
  SampleWriter out(members);
  out.texts("supernova", "", [](const Member& m) { return m.datum.name; });
  out.texts("surveys", "that its light curve is from",
            [](const Member& m) { return joined_list(m.datum.surveys, ","); });
  write_place(out);
  write_host(out, run.standardisation.options.host_mass);
  write_fit(out, subjects);
  write_rules(out, members, cuts);
  return {std::move(out.table), cuts_table(calibrators.empty() ? cuts : apply_cuts(flow, cut_rules(run.cuts)))};
}

std::vector<CutSubject> cut_subjects(const Table& sample) {
  std::vector<CutSubject> out(sample.rows());
  const auto names = sample.strings("supernova"), surveys = sample.strings("surveys");
  const auto trusted = sample.flags("trusted");
  const auto bands = sample.integers("bands"), epochs = sample.integers("epochs");
  for (std::size_t i = 0; i < out.size(); ++i) {
    out[i].supernova = names[i];
    out[i].survey = surveys[i];
    out[i].trusted = trusted[i];
    out[i].bands = static_cast<int>(bands[i]);
    out[i].epochs = static_cast<int>(epochs[i]);
  }
  const auto fill = [&](const char* name, const char* unit, double CutSubject::*member) {
    const auto values = *unit ? sample.reals_in(name, unit) : sample.reals(name);
    for (std::size_t i = 0; i < out.size(); ++i) out[i].*member = values[i];
  };
  fill("s", "", &CutSubject::s);
  fill("c", "mag", &CutSubject::c);
  fill("t_0_error", "d", &CutSubject::t_0_error);
  fill("m_b_error", "mag", &CutSubject::m_b_error);
  fill("s_error", "", &CutSubject::s_error);
  fill("c_error", "mag", &CutSubject::c_error);
  fill("first_phase", "d", &CutSubject::first_phase);
  fill("last_phase", "d", &CutSubject::last_phase);
  fill("mw_ebv", "mag", &CutSubject::mw_ebv);
  fill("z_flow", "", &CutSubject::z_flow);
  fill("fit_probability", "", &CutSubject::fit_probability);
  fill("host_log_mass", "dex", &CutSubject::host_log_mass);
  return out;
}

}  // namespace thirdrung
