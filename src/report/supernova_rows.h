#pragma once

#include <limits>
#include <string>
#include <unordered_map>
#include <vector>

#include "report/run_tables.h"

namespace thirdrung {

/// What the page knows of one supernova: the result tables joined on its name. NaN and "" where a stage has not run.
struct SupernovaRow {
  static constexpr double missing = std::numeric_limits<double>::quiet_NaN();

  std::string name;
  std::string survey;  ///< All surveys that saw it, as the sample has them.
  double ra = missing, dec = missing;
  double z_helio = missing, z_cmb = missing, z_flow = missing, z_flow_error = missing, v_pec = missing;
  double mw_ebv = missing, host_log_mass = missing, host_log_mass_error = missing, host_mass_probability = missing;
  double t_0 = missing, t_0_error = missing;
  double m_b = missing, m_b_error = missing, s = missing, s_error = missing, c = missing, c_error = missing;
  double cov_mb_s = missing, cov_mb_c = missing, cov_s_c = missing;  ///< Covariances of the fit.
  double chi2 = missing, dof = missing, fit_probability = missing, first_phase = missing, last_phase = missing,
         dm15_b = missing;
  double m_standard = missing, m_standard_error = missing;  ///< Standardised magnitude [mag].
  double residual = missing, residual_error = missing;      ///< From the fitted relation [mag], fainter is positive.
  double influence = missing, influence_error = missing;    ///< Shift of a_B when it is left out.
  double weight = missing;
  std::string bands, bands_left_out, remarks, removed_by, removed_by_all;
  int mistrusted_epochs = 0;
  bool trusted = true;  ///< The light-curve fit raised no flag that bars it.
  bool used = false;    ///< It stands in the intercept's sample.
  bool chauvenet_mistrusted = false;
};

/// Rows of the whole run in the order of the sample table (of the fits where there is no sample).
struct SupernovaRows {
  std::vector<SupernovaRow> rows;
  std::unordered_map<std::string, std::size_t> index;  ///< Name to row.
  std::vector<std::string> surveys;                    ///< Distinct, the one with most supernovae first.
};

SupernovaRows join_supernova_rows(const RunTables& run);

}  // namespace thirdrung
