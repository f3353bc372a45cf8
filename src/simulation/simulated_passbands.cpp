#include "simulation/simulated_passbands.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {

Passband simulated_curve(const SimulatedPassband& passband) {
  const double step = std::clamp(passband.edge / 8, 2.0, 25.0);
  const double reach = 0.5 * (passband.width + passband.edge);
  const auto half_points = static_cast<int>(std::ceil(reach / step));
  std::vector<double> wavelength;
  std::vector<double> throughput;
  for (int i = -half_points; i <= half_points; ++i) {
    const double from_centre = step * i;
    const double into_edge = (std::abs(from_centre) - 0.5 * (passband.width - passband.edge)) / passband.edge;
    const double fall = 0.5 * (1 + std::cos(constants::pi * std::clamp(into_edge, 0.0, 1.0)));
    wavelength.push_back(passband.centre + from_centre);
    throughput.push_back(0.8 * fall * (1 + 0.06 * from_centre / passband.width));
  }
  throughput.front() = 0;
  throughput.back() = 0;
  return {passband.id, wavelength, throughput, Response::photon};
}

PassbandCatalogue simulated_catalogue(const SimulationOptions& options) {
  PassbandCatalogue out;
  for (const SimulatedPassband& passband : options.passbands) {
    CalibratedPassband entry{simulated_curve(passband)};
    entry.zero_point_error = passband.zero_point_error;
    entry.wavelength_error = passband.wavelength_error;
    out.add(std::move(entry));
  }
  return out;
}

}  // namespace thirdrung
