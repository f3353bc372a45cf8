#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>

#include "base/constants.h"
#include "light/dust_law.h"
#include "template/rest_band.h"
#include "training/training_figures.h"

namespace thirdrung {

namespace {

using Values = SvgPlot::Values;
using Axis = SvgPlot::Axis;

Values steps(double from, double to, double step) {
  Values out;
  const auto count = static_cast<int>(std::lround((to - from) / step));
  for (int i = 0; i <= count; ++i) out.push_back(from + step * i);
  return out;
}

/// 1σ error of the fiducial magnitude in a band at one phase [mag].
double magnitude_error(const TrainingResult& result, const RestBand& band, double q) {
  const SpectralTemplate& model = result.state.model;
  Eigen::VectorXd share = Eigen::VectorXd::Zero(model.wavelength_basis.size());
  double all = 0;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    const double photons = band.weight[j] * model.flux(q, band.wavelength[j], 1, 0);
    const auto basis = model.wavelength_basis.at(band.wavelength[j]);
    for (int k = 0; k < 4; ++k) share(basis.first + k) += photons * basis.value[static_cast<std::size_t>(k)];
    all += photons;
  }
  share /= all;
  return std::sqrt(std::max(0.0, share.dot(phi_slice_covariance(result, q) * share))) / constants::ln_flux_per_mag;
}

/// Light and dark tones of one colour for values beside the fiducial one.
struct Variant {
  double s, c;
  std::string label, colour;
};

void light_curve_row(SvgPlot& plot, const TrainingResult& result, double top, const std::vector<Variant>& variants,
                     bool titled) {
  const SpectralTemplate& model = result.state.model;
  const Values phase = steps(-15, 45, 1);
  constexpr double wide = 164, high = 215, gap = 28;
  double left = 58;
  for (const RestBand& band : rest_bands_ubvri(model)) {
    const bool first = left < 60;
    plot.panel({left, top, wide, high}, {-18, 48, titled ? "" : "phase [d]", {}},
               {4.2, -1.6, first ? "magnitude − fiducial at B maximum" : "", {}}, titled ? band.name : "");
    const double zero = magnitude_in(band, model, 0);
    Values low, up;
    for (const double p : phase) {
      const double value = magnitude_in(band, model, p) - zero;
      const double error = magnitude_error(result, band, p);
      low.push_back(value + error);
      up.push_back(value - error);
    }
    plot.band(phase, low, up, SvgPlot::ink);
    double label_at = -1.3;
    for (const Variant& variant : variants) {
      Values y;
      for (const double p : phase) y.push_back(magnitude_in(band, model, p, variant.s, variant.c) - zero);
      const bool fiducial = variant.s == 1 && variant.c == 0;
      plot.line(phase, y, variant.colour, fiducial ? 1.8 : 1.2);
      if (first) plot.text(47, label_at, variant.label, variant.colour, "end", 10.5);
      label_at += 0.34;
    }
    left += wide + gap;
  }
}

}  // namespace

Eigen::MatrixXd phi_slice_covariance(const TrainingResult& result, double q) {
  const SpectralTemplate& model = result.state.model;
  const CoefficientLayout layout(model);
  const auto phase = model.phase_basis.at(q);
  const int n = layout.phi_wavelengths;
  Eigen::MatrixXd out = Eigen::MatrixXd::Zero(n, n);
  if (result.covariance.rows() != layout.size()) return out;
  for (int a = 0; a < 4; ++a) {
    for (int b = 0; b < 4; ++b) {
      const double weight = phase.value[static_cast<std::size_t>(a)] * phase.value[static_cast<std::size_t>(b)];
      out += weight * result.covariance.block(layout.phi(phase.first + a, 0), layout.phi(phase.first + b, 0), n, n);
    }
  }
  return out;
}

double reddening_as_colour(const Extinction& law, const SpectralTemplate& model, double wavelength) {
  const auto relative = [&](double w) { return law.relative(w); };
  const double in_b = mean_in(gauge_band_b(model), model, relative);
  const double in_v = mean_in(gauge_band_v(model), model, relative);
  return (law.relative(wavelength) - in_b) / (in_b - in_v);
}

SvgPlot light_curve_figure(const TrainingResult& result) {
  SvgPlot plot(1020, 560);
  const std::string light_blue = "#8fa2e6", light_orange = "#e0a25f";
  light_curve_row(plot, result, 34,
                  {{0.8, 0, "s = 0.8", SvgPlot::orange},
                   {0.9, 0, "0.9", light_orange},
                   {1, 0, "1", SvgPlot::ink},
                   {1.1, 0, "1.1", light_blue},
                   {1.2, 0, "1.2", SvgPlot::blue}},
                  true);
  light_curve_row(plot, result, 290,
                  {{1, -0.1, "c = −0.1", SvgPlot::blue},
                   {1, 0, "0", SvgPlot::ink},
                   {1, 0.2, "0.2", light_orange},
                   {1, 0.4, "0.4", SvgPlot::orange}},
                  false);
  return plot;
}

SvgPlot spectra_figure(const TrainingResult& result) {
  const SpectralTemplate& model = result.state.model;
  SvgPlot plot(760, 720);
  const std::array<double, 8> phases = {-12, -7, 0, 7, 14, 21, 30, 45};
  constexpr double apart = 1.3;
  constexpr double largest_error = 0.5;  // of ln flux; beyond, nothing is drawn
  plot.panel({62, 24, 640, 640}, {model.wavelength_min, model.wavelength_max + 500, "rest-frame wavelength [Å]", {}},
             {-8 * apart - 2.2, 1.4, "ln flux density per Å + constant", {}});
  const Values waves = steps(model.wavelength_min, model.wavelength_max, 20);
  for (std::size_t i = 0; i < phases.size(); ++i) {
    const double q = phases[i];
    // Flux relative to that at 5500 Å, one spectrum below the other.
    const double level = model.phi(q, 5500) + apart * static_cast<double>(i) + 0.6;
    const Eigen::MatrixXd covariance = phi_slice_covariance(result, q);
    Values x, y, low, high;
    for (const double wave : waves) {
      const auto basis = model.wavelength_basis.at(wave);
      const Eigen::Map<const Eigen::Vector4d> w(basis.value.data());
      const double variance = w.dot(covariance.block(basis.first, basis.first, 4, 4) * w);
      const double error = std::sqrt(std::max(0.0, variance));
      if (error > largest_error) {
        if (wave > 5500) break;
        x.clear(), y.clear(), low.clear(), high.clear();
        continue;
      }
      x.push_back(wave);
      y.push_back(model.phi(q, wave) - level);
      low.push_back(y.back() - error);
      high.push_back(y.back() + error);
    }
    if (x.empty()) continue;
    const std::string colour = i == 2 ? SvgPlot::blue : SvgPlot::ink;
    plot.band(x, low, high, colour);
    plot.line(x, y, colour, 1.2);
    plot.text(x.back() + 60, std::max(y.back() - 0.1, -8 * apart - 2.1),
              fmt::format("{}{:.0f} d",
                          q < 0   ? "−"
                          : q > 0 ? "+"
                                  : "",
                          std::abs(q)),
              colour);
  }
  return plot;
}

SvgPlot colour_law_figure(const TrainingResult& result) {
  const SpectralTemplate& model = result.state.model;
  const CoefficientLayout layout(model);
  SvgPlot plot(720, 560);
  const double first = std::max(2500.0, model.colour_basis.front());
  const Values waves = steps(first, model.colour_basis.back(), 20);
  const Extinction steep(DustLaw::fitzpatrick99, 2.0);
  const Extinction usual(DustLaw::fitzpatrick99, 3.1);
  Values law, low, high, r2, r31, below, above, difference, difference2;
  for (const double wave : waves) {
    const auto basis = model.colour_basis.at(wave);
    const Eigen::Map<const Eigen::Vector4d> w(basis.value.data());
    double error = 0;
    if (result.covariance.rows() == layout.size()) {
      const int at = layout.colour(basis.first);
      error = std::sqrt(std::max(0.0, w.dot(result.covariance.block(at, at, 4, 4) * w)));
    }
    law.push_back(model.colour(wave));
    low.push_back(law.back() - error);
    high.push_back(law.back() + error);
    r2.push_back(reddening_as_colour(steep, model, wave));
    r31.push_back(reddening_as_colour(usual, model, wave));
    difference.push_back(law.back() - r31.back());
    difference2.push_back(r2.back() - r31.back());
    below.push_back(difference.back() - error);
    above.push_back(difference.back() + error);
  }
  const Axis wave_axis{first, model.colour_basis.back(), "", {}};
  plot.panel({66, 20, 620, 320}, wave_axis, {-3.4, 4.2, "K [mag per mag of c]", {}});
  plot.line(waves, r2, SvgPlot::orange, 1.3, true);
  plot.line(waves, r31, SvgPlot::teal, 1.3, true);
  plot.band(waves, low, high, SvgPlot::blue);
  plot.line(waves, law, SvgPlot::blue, 1.8);
  plot.text(7000, 3.4, "template", SvgPlot::blue);
  plot.text(7000, 2.85, "Fitzpatrick 1999, R_V = 2", SvgPlot::orange);
  plot.text(7000, 2.3, "Fitzpatrick 1999, R_V = 3.1", SvgPlot::teal);
  Axis below_axis = wave_axis;
  below_axis.label = "rest-frame wavelength [Å]";
  plot.panel({66, 372, 620, 135}, below_axis, {-0.8, 1.2, "K − K (R_V = 3.1)", {}});
  plot.line(waves, Values(waves.size(), 0.0), SvgPlot::teal, 1.3, true);
  plot.line(waves, difference2, SvgPlot::orange, 1.3, true);
  plot.band(waves, below, above, SvgPlot::blue);
  plot.line(waves, difference, SvgPlot::blue, 1.8);
  return plot;
}

SvgPlot scatter_figure(const TrainingResult& result) {
  const SpectralTemplate& model = result.state.model;
  SvgPlot plot(980, 560);
  const Axis phase_axis{-15, 45, "phase [d]", {}};
  const Axis wave_axis{2600, 9400, "rest-frame wavelength [Å]", {}};
  plot.panel({66, 34, 380, 200}, wave_axis, {-15, 45, "phase [d]", {}}, "ε: scatter of single epochs [%]");
  const double brightest = 0.15;
  for (double p = -15; p < 45; p += 2) {
    for (double w = 2600; w < 9400; w += 100) {
      plot.cell(w, p, w + 100, p + 2, SvgPlot::shade(model.epoch_scatter(p + 1, w + 50) / brightest));
    }
  }
  for (const double p : {-10.0, 0.0, 10.0, 20.0, 35.0}) {
    for (const double w : {3000.0, 3600.0, 4400.0, 5500.0, 6500.0, 7600.0, 8800.0}) {
      const double value = model.epoch_scatter(p, w);
      plot.text(w, p - 1.3, fmt::format("{:.1f}", 100 * value), value > 0.07 ? "#ffffff" : SvgPlot::ink, "middle", 10);
    }
  }
  const Values waves = steps(2600, 9400, 50);
  Values kappa;
  for (const double w : waves) kappa.push_back(model.colour_scatter(w));
  const double top = 1.1 * *std::max_element(kappa.begin(), kappa.end());
  plot.panel({66, 310, 380, 200}, wave_axis, {0, top, "κ", {}}, "κ: scatter common to a band");
  plot.line(waves, kappa, SvgPlot::blue, 1.8);
  plot.panel({536, 34, 400, 476}, {-18, 52, phase_axis.label, {}}, {-10.5, 3, "Γ − 2 per band", {{0, "0"}}},
             "Γ: change of ln flux with stretch, at fixed p/s");
  const Values phases = steps(-18, 52, 1);
  double down = 0;
  for (const RestBand& band : rest_bands_ubvri(model)) {
    Values y;
    for (const double q : phases) y.push_back(mean_in(band, model, [&](double w) { return model.gamma(q, w); }) - down);
    plot.line({-18, 52}, {-down, -down}, SvgPlot::rule, 0.8);
    plot.line(phases, y, SvgPlot::blue, 1.5);
    plot.text(50, -down + 0.35, band.name, SvgPlot::ink, "end", 12);
    down += 2;
  }
  return plot;
}

}  // namespace thirdrung
