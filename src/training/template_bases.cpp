#include "training/template_bases.h"

#include <cmath>
#include <map>

#include "base/constants.h"
#include "template/band_weights.h"
#include "training/crude_start.h"

namespace thirdrung {

namespace {

/// Breakpoints from `from` (included) to `to` (left out), as near to `step` apart as divides the stretch evenly.
void append(std::vector<double>& into, double from, double to, double step) {
  const int pieces = std::max(1, static_cast<int>(std::lround((to - from) / step)));
  for (int k = 0; k < pieces; ++k) into.push_back(from + (to - from) * k / pieces);
}

std::vector<double> phase_knots(const TemplateBasesOptions& o) {
  std::vector<double> out;
  append(out, o.phase_first, -8, 4);
  append(out, -8, 28, o.phase_step);
  append(out, 28, o.phase_last, 6.4);
  out.push_back(o.phase_last);
  return out;
}

std::vector<double> wavelength_knots(const TemplateBasesOptions& o) {
  std::vector<double> out;
  append(out, o.wavelength_first, o.fine_first, o.coarse_step);
  append(out, o.fine_first, o.fine_last, o.fine_step);
  append(out, o.fine_last, o.wavelength_last, o.coarse_step);
  out.push_back(o.wavelength_last);
  return out;
}

/// Γ and K change slowly: knots of their own, wider than those of Φ.
std::vector<double> gamma_wavelength_knots(const TemplateBasesOptions& o) {
  std::vector<double> out;
  append(out, o.wavelength_first, 8000, 290);
  append(out, 8000, o.wavelength_last, 450);
  out.push_back(o.wavelength_last);
  return out;
}

void set_gauge(SpectralTemplate& model, const CalibratedPassband& b, const CalibratedPassband& v) {
  const auto weights = [](const CalibratedPassband& band) {
    BandWeights out = band_weights(band.passband, 0.0, Extinction(), 0.0, 10.0);
    const double zero = constants::ab_zero_jansky * 1e6 * std::pow(10.0, -0.4 * band.ab_magnitude_of_zero);
    for (double& weight : out.weight) weight /= zero;
    return out;
  };
  std::map<double, std::pair<double, double>> joint;
  const BandWeights in_b = weights(b);
  const BandWeights in_v = weights(v);
  for (std::size_t j = 0; j < in_b.weight.size(); ++j) joint[in_b.wavelength[j]].first = in_b.weight[j];
  for (std::size_t j = 0; j < in_v.weight.size(); ++j) joint[in_v.wavelength[j]].second = in_v.weight[j];
  for (const auto& [wavelength, pair] : joint) {
    model.gauge_wavelength.push_back(wavelength);
    model.gauge_weight_b.push_back(pair.first);
    model.gauge_weight_v.push_back(pair.second);
  }
}

}  // namespace

SpectralTemplate start_template(const TemplateBasesOptions& options, const PassbandCatalogue& catalogue,
                                const std::string& gauge_b, const std::string& gauge_v) {
  SpectralTemplate model;
  model.phase_basis = CubicBasis(phase_knots(options));
  model.wavelength_basis = CubicBasis(wavelength_knots(options));
  model.stretch_phase_basis = CubicBasis({options.phase_first, -12, -6, 0, 6, 12, 18, 25, 33, 45, options.phase_last});
  model.stretch_wavelength_basis = CubicBasis(gamma_wavelength_knots(options));
  model.colour_basis =
      CubicBasis({options.wavelength_first, 3000, 3600, 4200, 4900, 5600, 6400, 7300, 8500, options.wavelength_last});
  model.scatter_phase = {-14, -8, -3, 3, 9, 16, 24, 33, 45};
  model.scatter_wavelength = {2800, 3400, 3900, 4500, 5200, 6000, 6800, 7600, 9000};
  model.colour_scatter_wavelength = {2800, 3300, 3800, 4400, 5000, 5700, 6500, 7600, 9000};
  const auto phases = static_cast<Eigen::Index>(model.scatter_phase.size());
  const auto waves = static_cast<Eigen::Index>(model.scatter_wavelength.size());
  const auto colours = static_cast<Eigen::Index>(model.colour_scatter_wavelength.size());
  model.log_epoch_scatter = Eigen::MatrixXd::Constant(phases, waves, std::log(0.05));
  model.log_colour_scatter = Eigen::VectorXd::Constant(colours, std::log(0.05));
  model.phase_min = options.usable_early;
  model.phase_max = options.usable_late;
  model.wavelength_min = options.usable_blue;
  model.wavelength_max = options.usable_red;
  set_gauge(model, catalogue.at(gauge_b), catalogue.at(gauge_v));
  crude_start(model);
  return model;
}

}  // namespace thirdrung
