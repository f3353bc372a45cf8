#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>

#include "training/training_figures.h"

namespace thirdrung {

namespace {

using Values = SvgPlot::Values;
using Axis = SvgPlot::Axis;

struct Columns {
  Values centre, offset, offset_error, chi2, chi2_error;
};

Columns columns_of(std::span<const ResidualBin> bins) {
  Columns out;
  for (const ResidualBin& bin : bins) {
    out.centre.push_back(bin.centre);
    out.offset.push_back(1e3 * bin.offset);
    out.offset_error.push_back(1e3 * bin.offset_error);
    out.chi2.push_back(bin.chi2_per_dof);
    out.chi2_error.push_back(bin.chi2_per_dof_error);
  }
  return out;
}

/// Axis of categories, the first on top.
Axis names_axis(std::span<const std::string> names) {
  Axis out{static_cast<double>(names.size()) - 0.5, -0.5, "", {}};
  for (std::size_t i = 0; i < names.size(); ++i) out.ticks.emplace_back(static_cast<double>(i), names[i]);
  return out;
}

Values ranks(std::size_t count) {
  Values out;
  for (std::size_t i = 0; i < count; ++i) out.push_back(static_cast<double>(i));
  return out;
}

}  // namespace

std::vector<double> phase_bin_edges() {
  return {-15, -10, -7, -4, -1, 2, 5, 9, 13, 18, 24, 30, 37, 45};
}

std::vector<double> redshift_bin_edges() {
  return {0, 0.02, 0.03, 0.04, 0.06, 0.1, 0.2, 0.3, 0.4, 0.5, 0.65, 1.2};
}

std::vector<WavelengthZone> wavelength_zones() {
  return {{"below 4000 Å", 0, 4000},
          {"4000 to 5000 Å", 4000, 5000},
          {"5000 to 6500 Å", 5000, 6500},
          {"above 6500 Å", 6500, 1e9}};
}

std::vector<HeldOutPoint> in_zone(std::span<const HeldOutPoint> points, const WavelengthZone& zone) {
  std::vector<HeldOutPoint> out;
  for (const HeldOutPoint& point : points) {
    if (point.rest_wavelength >= zone.blue && point.rest_wavelength < zone.red) out.push_back(point);
  }
  return out;
}

SvgPlot residual_figure(std::span<const HeldOutPoint> points) {
  const auto by_band = bins_by(points, [](const HeldOutPoint& p) { return p.survey + " " + p.passband; });
  const Columns band = columns_of(by_band);
  std::vector<std::string> names;
  names.reserve(by_band.size());
  for (const ResidualBin& bin : by_band) names.push_back(bin.name);
  const double list_height = std::max(380.0, 19.0 * static_cast<double>(names.size()));
  SvgPlot plot(1060, list_height + 90);
  const Axis list = names_axis(names);
  Axis unnamed = list;
  for (auto& tick : unnamed.ticks) tick.second = "";
  const double most =
      std::max(25.0, 1.25 * std::abs(*std::max_element(band.offset.begin(), band.offset.end(),
                                                       [](double a, double b) { return std::abs(a) < std::abs(b); })));
  plot.panel({190, 30, 190, list_height}, {-most, most, "data − template [mmag]", {}}, list, "by passband");
  plot.line({0, 0}, {list.from, list.to}, SvgPlot::rule);
  plot.points_across(band.offset, ranks(names.size()), band.offset_error, SvgPlot::blue);
  plot.panel({400, 30, 120, list_height}, {0.4, 1.8, "χ² per degree of freedom", {}}, unnamed);
  plot.cell(0.9, list.from, 1.1, list.to, "#eeece6");
  plot.points_across(band.chi2, ranks(names.size()), band.chi2_error, SvgPlot::blue);

  const double height = 0.5 * (list_height - 60) - 20;
  const std::vector<double> phases = phase_bin_edges();
  const Columns phase = columns_of(bins_by(
      points, [](const HeldOutPoint& p) { return p.phase; }, phases, "d"));
  plot.panel({600, 30, 420, 0.5 * height}, {-16, 46, "", {}}, {-30, 30, "mmag", {}}, "by phase");
  plot.line({-16, 46}, {0, 0}, SvgPlot::rule);
  plot.points(phase.centre, phase.offset, phase.offset_error, SvgPlot::blue);
  plot.panel({600, 60 + 0.5 * height, 420, 0.5 * height}, {-16, 46, "phase [d]", {}}, {0.5, 1.7, "χ² per dof", {}});
  plot.cell(-16, 0.9, 46, 1.1, "#eeece6");
  plot.points(phase.centre, phase.chi2, phase.chi2_error, SvgPlot::blue);

  const std::vector<double> redshifts = redshift_bin_edges();
  const std::string colours[] = {SvgPlot::plum, SvgPlot::blue, SvgPlot::teal, SvgPlot::orange};
  // Redshift goes by its logarithm: half of the sample lies below 0.1.
  Axis z_axis{std::log10(0.009), 0, "redshift (dots shifted apart)", {}};
  for (const double z : {0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0})
    z_axis.ticks.emplace_back(std::log10(z), fmt::format("{}", z));
  double reach = 60;
  for (const WavelengthZone& zone : wavelength_zones()) {
    for (const ResidualBin& bin : bins_by(
             in_zone(points, zone), [](const HeldOutPoint& p) { return p.z; }, redshifts, "")) {
      if (bin.supernovae >= 5) reach = std::max(reach, 1.15e3 * std::abs(bin.offset));
    }
  }
  plot.panel({600, 148 + height, 420, list_height - height - 118}, z_axis, {-reach, reach, "mmag", {}},
             "by redshift, in four zones of rest wavelength");
  plot.line({z_axis.from, z_axis.to}, {0, 0}, SvgPlot::rule);
  std::size_t k = 0;
  for (const WavelengthZone& zone : wavelength_zones()) {
    Columns column = columns_of(bins_by(
        in_zone(points, zone), [](const HeldOutPoint& p) { return p.z; }, redshifts, ""));
    for (double& z : column.centre) z = std::log10(z) + 0.008 * (static_cast<double>(k) - 1.5);
    plot.points(column.centre, column.offset, column.offset_error, colours[k]);
    plot.line(column.centre, column.offset, colours[k], 0.8);
    plot.text(-1.98 + 0.5 * static_cast<double>(k), -0.9 * reach, zone.name, colours[k]);
    ++k;
  }
  return plot;
}

SvgPlot residual_map_figure(std::span<const HeldOutPoint> points) {
  SvgPlot plot(760, 420);
  const std::vector<double> phases = phase_bin_edges();
  const std::vector<double> waves = {2700, 3200, 3600, 4000, 4400, 4800, 5200, 5700, 6300, 7000, 7800, 8600, 9600};
  plot.panel(
      {62, 34, 660, 330}, {waves.front(), waves.back(), "rest-frame wavelength of the band [Å]", {}},
      {-15, 45, "phase [d]", {}},
      "Mean held-out pull: blue, data fainter (to −0.3); orange, brighter (to +0.3). Number: χ² per degree of freedom");
  for (std::size_t i = 0; i + 1 < waves.size(); ++i) {
    const auto column = in_zone(points, {"", waves[i], waves[i + 1]});
    for (std::size_t k = 0; k + 1 < phases.size(); ++k) {
      const std::vector<double> edges = {phases[k], phases[k + 1]};
      const auto bins = bins_by(
          column, [](const HeldOutPoint& p) { return p.phase; }, edges, "d");
      if (bins.empty() || bins.front().points < 20) continue;
      const ResidualBin& bin = bins.front();
      plot.cell(waves[i], phases[k], waves[i + 1], phases[k + 1], SvgPlot::two_sided(bin.mean_pull / 0.3));
      plot.text(0.5 * (waves[i] + waves[i + 1]), 0.5 * (phases[k] + phases[k + 1]) - 0.7,
                fmt::format("{:.2f}", bin.chi2_per_dof), SvgPlot::ink, "middle", 10);
    }
  }
  return plot;
}

SvgPlot cross_validation_figure(const CrossValidationResult& result) {
  SvgPlot plot(720, 520);
  struct Kind {
    const char* name;
    double Smoothness::*strength;
  };
  // Named as in CrossValidationPoint::kind.
  const Kind kinds[] = {{"phi along phase", &Smoothness::phi_phase},
                        {"phi along wavelength", &Smoothness::phi_wavelength},
                        {"gamma", &Smoothness::gamma_phase},
                        {"colour law", &Smoothness::colour}};
  double best = std::numeric_limits<double>::infinity();
  for (const CrossValidationPoint& point : result.points) best = std::min(best, point.score);
  double worst = 0;
  for (const CrossValidationPoint& point : result.points) {
    if (std::isfinite(point.score)) worst = std::max(worst, point.score - best);
  }
  for (std::size_t k = 0; k < 4; ++k) {
    Values tried, score, chosen, chosen_score;
    for (const CrossValidationPoint& point : result.points) {
      if (point.kind != kinds[k].name && point.kind != "start") continue;
      tried.push_back(std::log10(point.smoothness.*kinds[k].strength));
      score.push_back(std::log10(1 + point.score - best));
      if (point.chosen) {
        chosen.push_back(tried.back());
        chosen_score.push_back(score.back());
      }
    }
    const double middle = std::log10(result.best.*kinds[k].strength);
    const std::size_t row = k / 2;
    const double left = 66 + 310 * static_cast<double>(k % 2);
    const double top = 36 + 245 * static_cast<double>(row);
    Axis y{-0.1, std::log10(1 + worst) + 0.2, k % 2 == 0 ? "score − best" : "", {}};
    for (const double tick : {0.0, 1.0, 3.0, 10.0, 30.0, 100.0, 300.0, 1000.0, 3000.0, 10000.0, 30000.0}) {
      if (tick < 1.5 * worst) y.ticks.emplace_back(std::log10(1 + tick), fmt::format("{}", tick));
    }
    double low = middle - 1;
    double high = middle + 1;
    for (const double x : tried) {
      low = std::min(low, x - 0.2);
      high = std::max(high, x + 0.2);
    }
    plot.panel({left, top, 260, 180}, {low, high, k >= 2 ? "log10 strength" : "", {}}, y, kinds[k].name);
    plot.line({middle, middle}, {-1, 6}, SvgPlot::orange, 1, true);
    plot.points(tried, score, {}, SvgPlot::muted);
    plot.points(chosen, chosen_score, {}, SvgPlot::blue);
  }
  return plot;
}

SvgPlot offsets_figure(std::span<const ZeroPointOffset> offsets) {
  std::vector<std::string> names;
  Values value, error;
  double most = 10;
  for (const ZeroPointOffset& offset : offsets) {
    names.push_back(offset.survey + " " + offset.passband);
    value.push_back(1e3 * offset.offset);
    error.push_back(1e3 * offset.error);
    most = std::max(most, std::abs(value.back()) + error.back());
  }
  const double height = std::max(80.0, 19.0 * static_cast<double>(names.size()));
  SvgPlot plot(640, height + 80);
  const Axis list = names_axis(names);
  plot.panel({190, 24, 410, height}, {-1.1 * most, 1.1 * most, "preferred zero-point shift [mmag]", {}}, list);
  plot.line({0, 0}, {list.from, list.to}, SvgPlot::rule);
  plot.points_across(value, ranks(names.size()), error, SvgPlot::blue);
  return plot;
}

}  // namespace thirdrung
