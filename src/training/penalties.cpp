#include "training/penalties.h"

#include <array>
#include <cmath>

namespace thirdrung {

namespace {

/// Second difference of three neighbouring coefficients, divided by the spacing of their centres and scaled back to one
/// step.
std::array<double, 3> second_difference(const std::vector<double>& centre, std::size_t i) {
  const double before = centre[i + 1] - centre[i];
  const double after = centre[i + 2] - centre[i + 1];
  const double step = 0.5 * (before + after);
  return {step / before, -step / before - step / after, step / after};
}

/// One linear prior row: indices, weights, strength. `visit(indices, weights, count, strength)` is called for every
/// row.
template <typename Visit>
void visit_rows(const SpectralTemplate& model, const Smoothness& smoothness, const Visit& visit) {
  const CoefficientLayout layout(model);
  const auto grid = [&](const CubicBasis& phase, const CubicBasis& wavelength, auto index, double phase_strength,
                        double wave_strength) {
    const auto phases = phase.centres();
    const auto waves = wavelength.centres();
    for (std::size_t i = 0; i < phases.size(); ++i) {
      for (std::size_t k = 0; k < waves.size(); ++k) {
        const auto row = static_cast<int>(i);
        const auto col = static_cast<int>(k);
        if (i + 2 < phases.size()) {
          visit({index(row, col), index(row + 1, col), index(row + 2, col)}, second_difference(phases, i),
                phase_strength);
        }
        if (k + 2 < waves.size()) {
          visit({index(row, col), index(row, col + 1), index(row, col + 2)}, second_difference(waves, k),
                wave_strength);
        }
      }
    }
  };
  grid(
      model.phase_basis, model.wavelength_basis, [&](int i, int k) { return layout.phi(i, k); }, smoothness.phi_phase,
      smoothness.phi_wavelength);
  grid(
      model.stretch_phase_basis, model.stretch_wavelength_basis, [&](int i, int k) { return layout.gamma(i, k); },
      smoothness.gamma_phase, smoothness.gamma_wavelength);
  for (int i = layout.gamma_start(); i < layout.colour_start(); ++i)
    visit({i, i, i}, {1.0, 0.0, 0.0}, smoothness.gamma_size);
  const auto colours = model.colour_basis.centres();
  for (std::size_t k = 0; k + 2 < colours.size(); ++k) {
    const auto i = static_cast<int>(k);
    visit({layout.colour(i), layout.colour(i + 1), layout.colour(i + 2)}, second_difference(colours, k),
          smoothness.colour);
  }
}

struct GaugeRow {
  double value;  ///< What should be zero.
  Eigen::VectorXd gradient;
};

void add_basis(const CubicBasis::Weights& w, double amount, Eigen::Ref<Eigen::VectorXd> into) {
  for (int k = 0; k < 4; ++k) into(w.first + k) += amount * w.value[static_cast<std::size_t>(k)];
}

std::vector<GaugeRow> gauge_rows(const SpectralTemplate& model) {
  const CoefficientLayout layout(model);
  std::vector<GaugeRow> rows(7, GaugeRow{0.0, Eigen::VectorXd::Zero(layout.size())});
  const auto put_phi = [&](GaugeRow& row, const CubicBasis::Weights& phase, const CubicBasis::Weights& wave,
                           double amount) {
    for (int i = 0; i < 4; ++i) {
      add_basis(wave, amount * phase.value[static_cast<std::size_t>(i)],
                row.gradient.segment(layout.phi(phase.first + i, 0), layout.phi_wavelengths));
    }
  };
  const auto put_gamma = [&](GaugeRow& row, const CubicBasis::Weights& phase, const CubicBasis::Weights& wave,
                             double amount) {
    for (int i = 0; i < 4; ++i) {
      add_basis(wave, amount * phase.value[static_cast<std::size_t>(i)],
                row.gradient.segment(layout.gamma(phase.first + i, 0), layout.gamma_wavelengths));
    }
  };
  struct Mean {
    double phase;
    const std::vector<double>& weight;
    int flux_row, slope_row, colour_row, gamma_row, gamma_slope_row;  // −1: no such condition here
    double colour_target;
  };
  const std::array<Mean, 3> means = {Mean{0.0, model.gauge_weight_b, 0, 1, 2, 4, 6, 0.0},
                                     Mean{0.0, model.gauge_weight_v, -1, -1, 3, -1, -1, -1.0},
                                     Mean{15.0, model.gauge_weight_b, -1, -1, -1, 5, -1, 0.0}};
  for (const Mean& mean : means) {
    const auto phase = model.phase_basis.at(mean.phase);
    const auto slope = model.phase_basis.slope_at(mean.phase);
    const auto gamma_phase = model.stretch_phase_basis.at(mean.phase);
    const Eigen::VectorXd phi_slope = model.phi_slice(mean.phase, true);
    double flux = 0;
    double mean_slope = 0;
    double mean_colour = 0;
    double mean_gamma = 0;
    const auto gamma_slope = model.stretch_phase_basis.slope_at(mean.phase);
    const Eigen::VectorXd gamma_slopes = model.gamma_slice(mean.phase, true);
    std::vector<double> share(mean.weight.size());
    std::vector<double> slopes(mean.weight.size());
    for (std::size_t j = 0; j < share.size(); ++j) {
      const double wavelength = model.gauge_wavelength[j];
      if (mean.weight[j] == 0.0) continue;
      share[j] = mean.weight[j] * model.flux(mean.phase, wavelength, 1, 0);
      flux += share[j];
      const auto wave = model.wavelength_basis.at(wavelength);
      for (int k = 0; k < 4; ++k) slopes[j] += wave.value[static_cast<std::size_t>(k)] * phi_slope(wave.first + k);
    }
    for (std::size_t j = 0; j < share.size(); ++j) {
      share[j] /= flux;
      if (share[j] == 0.0) continue;
      mean_slope += share[j] * slopes[j];
      mean_colour += share[j] * model.colour(model.gauge_wavelength[j]);
      mean_gamma += share[j] * model.gamma(mean.phase, model.gauge_wavelength[j]);
    }
    // Slope in q of the B light curve's response to s: zero, so that B peaks at p = 0 whatever s. Without it a change
    // of t_0 with s goes unnoticed into Γ, since B is flat at its peak, and s loses its scale.
    std::vector<double> gammas(share.size());
    std::vector<double> gamma_slope_at(share.size());
    double mean_gamma_slope = 0;
    double mean_product = 0;
    for (std::size_t j = 0; j < share.size(); ++j) {
      if (share[j] == 0.0) continue;
      const auto wave = model.stretch_wavelength_basis.at(model.gauge_wavelength[j]);
      for (int k = 0; k < 4; ++k) {
        gamma_slope_at[j] += wave.value[static_cast<std::size_t>(k)] * gamma_slopes(wave.first + k);
      }
      gammas[j] = model.gamma(mean.phase, model.gauge_wavelength[j]);
      mean_gamma_slope += share[j] * gamma_slope_at[j];
      mean_product += share[j] * gammas[j] * slopes[j];
    }
    if (mean.flux_row >= 0) rows[static_cast<std::size_t>(mean.flux_row)].value = std::log(flux);
    if (mean.slope_row >= 0) rows[static_cast<std::size_t>(mean.slope_row)].value = mean_slope;
    if (mean.colour_row >= 0) rows[static_cast<std::size_t>(mean.colour_row)].value = mean_colour - mean.colour_target;
    if (mean.gamma_row >= 0) rows[static_cast<std::size_t>(mean.gamma_row)].value = mean_gamma;
    if (mean.gamma_slope_row >= 0)
      rows[static_cast<std::size_t>(mean.gamma_slope_row)].value =
          mean_gamma_slope + mean_product - mean_gamma * mean_slope;
    for (std::size_t j = 0; j < share.size(); ++j) {
      if (share[j] == 0.0) continue;
      const double wavelength = model.gauge_wavelength[j];
      const auto wave = model.wavelength_basis.at(wavelength);
      if (mean.flux_row >= 0) put_phi(rows[static_cast<std::size_t>(mean.flux_row)], phase, wave, share[j]);
      if (mean.slope_row >= 0) {
        GaugeRow& row = rows[static_cast<std::size_t>(mean.slope_row)];
        put_phi(row, slope, wave, share[j]);
        put_phi(row, phase, wave, share[j] * (slopes[j] - mean_slope));
      }
      if (mean.colour_row >= 0) {
        GaugeRow& row = rows[static_cast<std::size_t>(mean.colour_row)];
        add_basis(model.colour_basis.at(wavelength), share[j],
                  row.gradient.segment(layout.colour_start(), layout.colours));
        put_phi(row, phase, wave, share[j] * (model.colour(wavelength) - mean_colour));
      }
      if (mean.gamma_slope_row >= 0) {
        GaugeRow& row = rows[static_cast<std::size_t>(mean.gamma_slope_row)];
        const auto gamma_wave = model.stretch_wavelength_basis.at(wavelength);
        put_gamma(row, gamma_slope, gamma_wave, share[j]);
        put_gamma(row, gamma_phase, gamma_wave, share[j] * (slopes[j] - mean_slope));
        put_phi(row, slope, wave, share[j] * (gammas[j] - mean_gamma));
        put_phi(row, phase, wave,
                share[j] * (gamma_slope_at[j] - mean_gamma_slope + gammas[j] * slopes[j] - mean_product -
                            (gammas[j] - mean_gamma) * mean_slope - mean_gamma * (slopes[j] - mean_slope)));
      }
      if (mean.gamma_row >= 0) {
        GaugeRow& row = rows[static_cast<std::size_t>(mean.gamma_row)];
        put_gamma(row, gamma_phase, model.stretch_wavelength_basis.at(wavelength), share[j]);
        put_phi(row, phase, wave, share[j] * (model.gamma(mean.phase, wavelength) - mean_gamma));
      }
    }
  }
  return rows;
}

}  // namespace

double half_smoothness(const SpectralTemplate& model, const Smoothness& smoothness) {
  const Eigen::VectorXd x = CoefficientLayout(model).gather(model);
  double sum = 0;
  visit_rows(model, smoothness,
             [&](const std::array<int, 3>& at, const std::array<double, 3>& weight, double strength) {
               const double value = weight[0] * x(at[0]) + weight[1] * x(at[1]) + weight[2] * x(at[2]);
               sum += 0.5 * strength * value * value;
             });
  return sum;
}

double add_smoothness(const SpectralTemplate& model, const Smoothness& smoothness, NormalEquations& into) {
  const Eigen::VectorXd x = CoefficientLayout(model).gather(model);
  double sum = 0;
  visit_rows(model, smoothness,
             [&](const std::array<int, 3>& at, const std::array<double, 3>& weight, double strength) {
               const double value = weight[0] * x(at[0]) + weight[1] * x(at[1]) + weight[2] * x(at[2]);
               sum += 0.5 * strength * value * value;
               for (std::size_t a = 0; a < 3; ++a) {
                 if (weight[a] == 0.0) continue;
                 into.gradient(at[a]) -= strength * weight[a] * value;
                 for (std::size_t b = 0; b <= a; ++b) {
                   if (weight[b] != 0.0) into.hessian(at[a], at[b]) += strength * weight[a] * weight[b];
                 }
               }
             });
  return sum;
}

GaugeConditions gauge_conditions(const SpectralTemplate& model) {
  const std::vector<GaugeRow> rows = gauge_rows(model);
  const auto count = static_cast<Eigen::Index>(rows.size());
  GaugeConditions out{Eigen::VectorXd(count), Eigen::MatrixXd(CoefficientLayout(model).size(), count)};
  for (Eigen::Index i = 0; i < count; ++i) {
    out.value(i) = rows[static_cast<std::size_t>(i)].value;
    out.gradient.col(i) = rows[static_cast<std::size_t>(i)].gradient;
  }
  return out;
}

double half_gauge(const SpectralTemplate& model, double error) {
  double sum = 0;
  for (const GaugeRow& row : gauge_rows(model)) sum += 0.5 * row.value * row.value / (error * error);
  return sum;
}

double add_gauge(const SpectralTemplate& model, double error, NormalEquations& into) {
  double sum = 0;
  for (const GaugeRow& row : gauge_rows(model)) {
    sum += 0.5 * row.value * row.value / (error * error);
    into.gradient -= row.gradient * (row.value / (error * error));
    into.hessian.selfadjointView<Eigen::Lower>().rankUpdate(row.gradient, 1 / (error * error));
  }
  return sum;
}

}  // namespace thirdrung
