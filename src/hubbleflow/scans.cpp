#include "hubbleflow/scans.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <set>

#include "base/error.h"
#include "base/text.h"
#include "hubbleflow/resampling.h"
#include "hubbleflow/robust.h"
#include "hubbleflow/sky_halves.h"

namespace thirdrung {

namespace {

const std::array<std::pair<ScanKind, const char*>, 14> kinds = {{{ScanKind::z_min, "z_min"},
                                                                 {ScanKind::z_max, "z_max"},
                                                                 {ScanKind::z_grid, "z_grid"},
                                                                 {ScanKind::surveys, "surveys"},
                                                                 {ScanKind::sky_halves, "sky_halves"},
                                                                 {ScanKind::host_mass, "host_mass"},
                                                                 {ScanKind::colour, "colour"},
                                                                 {ScanKind::stretch, "stretch"},
                                                                 {ScanKind::date, "date"},
                                                                 {ScanKind::dipole, "dipole"},
                                                                 {ScanKind::q0, "q0"},
                                                                 {ScanKind::jackknife, "jackknife"},
                                                                 {ScanKind::bootstrap, "bootstrap"},
                                                                 {ScanKind::robust, "robust"}}};

std::vector<double> steps(double first, double last, double step) {
  std::vector<double> values;
  const int count = static_cast<int>(std::lround((last - first) / step));
  for (int i = 0; i <= count; ++i) values.push_back(first + i * step);
  return values;
}

std::vector<double> z_min_values(const ScanAxis& axis) {
  return axis.values.empty() ? steps(0.01, 0.06, 0.005) : axis.values;
}
std::vector<double> z_max_values(const std::vector<double>& given) {
  return given.empty() ? steps(0.06, 0.20, 0.02) : given;
}

NamedSubset redshift_subset(const ScanFrame& frame, double z_min, double z_max) {
  return {fmt::format("{:g} < z < {:g}", z_min, z_max),
          {z_min, z_max},
          in_redshift_range(frame.sample().supernovae, z_min, z_max)};
}

std::vector<NamedSubset> redshift_subsets(const ScanFrame& frame, const ScanAxis& axis) {
  std::vector<NamedSubset> subsets;
  const InterceptOptions& base = frame.options();
  if (axis.kind == ScanKind::z_min) {
    for (const double z : z_min_values(axis)) subsets.push_back(redshift_subset(frame, z, base.z_max));
  } else if (axis.kind == ScanKind::z_max) {
    for (const double z : z_max_values(axis.values)) subsets.push_back(redshift_subset(frame, base.z_min, z));
  } else {
    for (const double low : z_min_values(axis)) {
      for (const double high : z_max_values(axis.second_values)) {
        if (low < high) subsets.push_back(redshift_subset(frame, low, high));
      }
    }
  }
  return subsets;
}

std::vector<NamedSubset> survey_subsets(const ScanFrame& frame) {
  std::set<std::string> surveys;
  const auto& supernovae = frame.sample().supernovae;
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    if (frame.baseline()[i]) surveys.insert(supernovae[i].surveys.begin(), supernovae[i].surveys.end());
  }
  std::vector<NamedSubset> without;
  std::vector<NamedSubset> alone;
  for (const std::string& survey : surveys) {
    NamedSubset out{"without " + survey, {}, frame.baseline()};
    NamedSubset only{survey + " alone", {}, frame.baseline()};
    for (std::size_t i = 0; i < supernovae.size(); ++i) {
      const auto& by = supernovae[i].surveys;
      const bool observed = std::find(by.begin(), by.end(), survey) != by.end();
      out.members[i] = out.members[i] && !observed;
      only.members[i] = only.members[i] && observed;
    }
    without.push_back(std::move(out));
    alone.push_back(std::move(only));
  }
  without.insert(without.end(), alone.begin(), alone.end());
  return without;
}

/// The two sides of a division of the baseline, and their difference.
std::vector<ScanRow> divide(const ScanFrame& frame, const ScanAxis& axis, double FlowSupernova::*quantity,
                            const char* symbol, double fallback, int threads) {
  const auto& supernovae = frame.sample().supernovae;
  std::vector<double> values;
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    if (frame.baseline()[i] && std::isfinite(supernovae[i].*quantity)) values.push_back(supernovae[i].*quantity);
  }
  const std::size_t absent =
      static_cast<std::size_t>(std::count(frame.baseline().begin(), frame.baseline().end(), true)) - values.size();
  double division = axis.values.empty() ? fallback : axis.values.front();
  if (!std::isfinite(division) && !values.empty()) {
    std::sort(values.begin(), values.end());
    division = 0.5 * (values[(values.size() - 1) / 2] + values[values.size() / 2]);
  }
  const std::string left_out = absent > 0 ? fmt::format(" ({} without a value)", absent) : "";
  NamedSubset above{fmt::format("{} > {:g}{}", symbol, division, left_out), {division}, frame.baseline()};
  NamedSubset below{fmt::format("{} < {:g}{}", symbol, division, left_out), {division}, frame.baseline()};
  for (std::size_t i = 0; i < supernovae.size(); ++i) {
    const double value = supernovae[i].*quantity;
    above.members[i] = above.members[i] && value >= division;  // false for NaN
    below.members[i] = below.members[i] && value < division;
  }
  const std::string scan = name_of(axis.kind);
  std::vector<ScanRow> rows = scan_subsets(frame, scan, {above, below}, threads);
  rows.push_back(difference_of(frame, scan, fmt::format("{} above minus below {:g}", symbol, division), above.members,
                               below.members));
  return rows;
}

/// The baseline with more free parameters: the same supernovae, other weights.
std::vector<ScanRow> freed(const ScanFrame& frame, ScanKind kind) {
  InterceptOptions options = frame.options();
  options.fit_dipole = options.fit_dipole || kind == ScanKind::dipole;
  options.fit_q0 = options.fit_q0 || kind == ScanKind::q0;
  const InterceptResult result = fit_intercept(frame.sample(), options);
  Eigen::VectorXd difference = -frame.baseline_weights();
  difference(places_of(frame.baseline())) += result.weights;
  std::string setting;
  std::vector<double> coordinates;
  if (kind == ScanKind::dipole) {
    const FlowDipole& d = *result.dipole;
    setting = fmt::format(
        "dipole free: {:.0f} +- {:.0f} km/s towards l = {:.0f} +- {:.0f}, b = {:.0f} +- {:.0f} (chance {:.2g})",
        d.amplitude, d.amplitude_error, d.l, d.l_error, d.b, d.b_error, d.probability);
    coordinates = {d.amplitude, d.amplitude_error, d.l, d.b, d.probability};
  } else {
    setting = fmt::format("q0 free: {:.2f} +- {:.2f}", *result.q0, *result.q0_error);
    coordinates = {*result.q0, *result.q0_error};
  }
  return {{name_of(kind), setting, coordinates, result.supernovae, result.a_b, result.error, result.a_b - frame.a_b(),
           frame.error_of(difference), ""}};
}

}  // namespace

std::string name_of(ScanKind kind) {
  return std::find_if(kinds.begin(), kinds.end(), [kind](const auto& k) { return k.first == kind; })->second;
}

ScanKind scan_kind(const std::string& name) {
  std::vector<std::string> names;
  for (const auto& [kind, known] : kinds) {
    if (name == known) return kind;
    names.emplace_back(known);
  }
  const std::string nearest = nearest_word(name, names);
  throw InputError({"", std::nullopt, "scan"}, fmt::format("there is no scan '{}'", name),
                   nearest.empty() ? fmt::format("known scans: {}", fmt::join(names, ", "))
                                   : fmt::format("did you mean '{}'?", nearest));
}

std::vector<ScanAxis> default_axes() {
  std::vector<ScanAxis> axes;
  for (const auto& [kind, name] : kinds) {
    ScanAxis axis;
    axis.kind = kind;
    axes.push_back(axis);
  }
  return axes;
}

std::vector<ScanRow> run_scan(const ScanFrame& frame, const ScanAxis& axis, int threads) {
  constexpr double median = std::numeric_limits<double>::quiet_NaN();
  switch (axis.kind) {
    case ScanKind::z_min:
    case ScanKind::z_max:
    case ScanKind::z_grid:
      return scan_subsets(frame, name_of(axis.kind), redshift_subsets(frame, axis), threads);
    case ScanKind::surveys:
      return scan_subsets(frame, name_of(axis.kind), survey_subsets(frame), threads);
    case ScanKind::sky_halves:
      return sky_halves_rows(frame, sky_halves(frame, axis.count > 0 ? axis.count : 96, threads));
    case ScanKind::host_mass:
      return divide(frame, axis, &FlowSupernova::host_log_mass, "log M", 10.0, threads);
    case ScanKind::colour:
      return divide(frame, axis, &FlowSupernova::c, "c", median, threads);
    case ScanKind::stretch:
      return divide(frame, axis, &FlowSupernova::s, "s", median, threads);
    case ScanKind::date:
      return divide(frame, axis, &FlowSupernova::peak_mjd, "MJD", median, threads);
    case ScanKind::dipole:
    case ScanKind::q0:
      return freed(frame, axis.kind);
    case ScanKind::jackknife:
      return {jackknife_row(frame)};
    case ScanKind::bootstrap:
      return {bootstrap_row(frame, axis.count > 0 ? axis.count : 2000, axis.seed)};
    case ScanKind::robust:
      return robust_rows(frame);
  }
  throw std::logic_error("unknown scan");
}

}  // namespace thirdrung
