#pragma once

#include <string>
#include <utility>
#include <vector>

#include "report/run_tables.h"

namespace thirdrung {

/// The first screen of the report in words, the same for page and terminal.
struct Answer {
  bool known = false;  ///< The run reached an intercept.
  bool blind = false;
  std::string symbol_value;        ///< "0.7145"
  std::string statistical;         ///< "0.0024", "" if not given
  std::string systematic;          ///< "0.0015", "" if not given
  std::string total;               ///< "0.0028", "" if not given
  std::string hubble_constant;     ///< "73.2 ± 1.3", "" if not given [km/s/Mpc]
  std::string absolute_magnitude;  ///< "−19.25 ± 0.03 mag, from 12 calibrators", "" if it is not from calibrators
  /// Label and value: supernovae, scatter, redshift range, alpha, beta ...
  std::vector<std::pair<std::string, std::string>> facts;
  /// What qualifies the answer: which error leads, whether a choice moves it, whether one supernova does.
  std::vector<std::string> qualifications;
  std::vector<std::string> warnings;
};

Answer make_answer(const RunTables& run);

/// "a_B = 0.7145 ± 0.0024 (stat) ± 0.0015 (sys)".
std::string answer_line(const Answer& answer);

}  // namespace thirdrung
