#include "standardisation/host_mass.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace thirdrung {

double host_mass_probability(double host_log_mass, double host_log_mass_error, const HostMassOptions& options) {
  if (!std::isfinite(host_log_mass)) return options.probability_when_absent;
  const bool has_error = std::isfinite(host_log_mass_error) && host_log_mass_error > 0.0;
  const double error = std::max(has_error ? host_log_mass_error : options.default_error, options.smallest_error);
  const double distance = options.step - (host_log_mass + options.mass_offset);
  return 0.5 * std::erfc(distance / (std::numbers::sqrt2 * error));
}

}  // namespace thirdrung
