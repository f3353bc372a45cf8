#include "training/residual_summary.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "base/constants.h"

namespace thirdrung {

namespace {

using Key = std::pair<std::string, std::string>;

/// Sum of a quantity about its mean, supernova by supernova, squared and summed.
template <typename Part>
double clustered_variance(std::span<const HeldOutPoint* const> points, const Part& part) {
  std::map<std::size_t, double> sums;
  for (const HeldOutPoint* point : points) sums[point->supernova] += part(*point);
  double out = 0;
  for (const auto& [supernova, sum] : sums) out += sum * sum;
  // Few clusters underestimate: the usual correction for the mean that they share.
  const auto n = static_cast<double>(sums.size());
  return n > 1 ? out * n / (n - 1) : out;
}

double quantile(std::vector<double>& sorted, double part) {
  const double at = part * static_cast<double>(sorted.size() - 1);
  const auto left = static_cast<std::size_t>(at);
  const std::size_t right = std::min(left + 1, sorted.size() - 1);
  return sorted[left] + (at - static_cast<double>(left)) * (sorted[right] - sorted[left]);
}

}  // namespace

std::vector<HeldOutPoint> held_out_points(const TrainingResult& result, std::span<const LightCurve> light_curves) {
  std::map<Key, const LightCurve*> light_curve_of;
  for (const LightCurve& one : light_curves) light_curve_of.try_emplace({one.survey, one.supernova}, &one);
  std::map<Key, std::map<std::string, double>> wavelength_of;
  for (const TrainingSupernova& sn : result.selection.supernovae) {
    for (const TrainingBand& band : sn.bands)
      wavelength_of[{sn.survey, sn.name}][band.passband] = band.weights.mean_wavelength;
  }
  std::vector<HeldOutPoint> out;
  std::size_t supernova = 0;
  for (const LightCurveFit& fit : result.out_of_fold.fits) {
    const auto trained = wavelength_of.find({fit.survey, fit.supernova});
    const auto source = light_curve_of.find({fit.survey, fit.supernova});
    if (trained == wavelength_of.end() || source == light_curve_of.end()) continue;
    if (!fit.trusted() || fit.epochs.size() <= 4) continue;
    for (const FittedEpoch& fitted : fit.epochs) {
      const Epoch& epoch = source->second->epochs[fitted.epoch];
      const std::string& passband = source->second->passbands[epoch.passband];
      const auto wavelength = trained->second.find(passband);
      if (wavelength == trained->second.end() || !(fitted.model_flux > 0)) continue;
      const double error = std::hypot(epoch.flux_error, fitted.model_error) / fitted.model_flux;
      HeldOutPoint point{supernova,   fit.survey, passband, fitted.phase,  wavelength->second, fit.z_helio,
                         fitted.pull, 0,          0,        fitted.freedom};
      point.magnitude = -(epoch.flux / fitted.model_flux - 1) / constants::ln_flux_per_mag;
      point.weight = std::pow(constants::ln_flux_per_mag / error, 2);
      out.push_back(point);
    }
    ++supernova;
  }
  return out;
}

ResidualBin summarise(const std::string& name, std::span<const HeldOutPoint* const> points) {
  ResidualBin out;
  out.name = name;
  out.points = static_cast<int>(points.size());
  if (points.empty()) return out;
  const auto n = static_cast<double>(points.size());
  std::set<std::size_t> supernovae;
  std::vector<double> pulls;
  double weight = 0;
  double squares = 0;
  double freedom = 0;
  for (const HeldOutPoint* point : points) {
    supernovae.insert(point->supernova);
    pulls.push_back(point->pull);
    out.mean_pull += point->pull / n;
    out.offset += point->weight * point->magnitude;
    weight += point->weight;
    squares += point->pull * point->pull;
    freedom += point->freedom;
  }
  out.supernovae = static_cast<int>(supernovae.size());
  out.offset /= weight;
  out.chi2_per_dof = squares / freedom;
  using Point = HeldOutPoint;
  out.mean_pull_error =
      std::sqrt(clustered_variance(points, [&](const Point& p) { return p.pull - out.mean_pull; })) / n;
  out.offset_error =
      std::sqrt(clustered_variance(points, [&](const Point& p) { return p.weight * (p.magnitude - out.offset); })) /
      weight;
  out.chi2_per_dof_error =
      std::sqrt(
          clustered_variance(points, [&](const Point& p) { return p.pull * p.pull - out.chi2_per_dof * p.freedom; })) /
      freedom;
  std::sort(pulls.begin(), pulls.end());
  out.width = 0.5 * (quantile(pulls, 0.8415) - quantile(pulls, 0.1585));
  return out;
}

std::vector<ResidualBin> bins_by(std::span<const HeldOutPoint> points,
                                 const std::function<std::string(const HeldOutPoint&)>& key) {
  std::map<std::string, std::vector<const HeldOutPoint*>> groups;
  for (const HeldOutPoint& point : points) groups[key(point)].push_back(&point);
  std::vector<ResidualBin> out;
  out.reserve(groups.size());
  for (const auto& [name, members] : groups) out.push_back(summarise(name, members));
  return out;
}

std::vector<ResidualBin> bins_by(std::span<const HeldOutPoint> points,
                                 const std::function<double(const HeldOutPoint&)>& value, std::span<const double> edges,
                                 const std::string& unit) {
  std::vector<ResidualBin> out;
  for (std::size_t k = 0; k + 1 < edges.size(); ++k) {
    std::vector<const HeldOutPoint*> members;
    double sum = 0;
    for (const HeldOutPoint& point : points) {
      const double x = value(point);
      if (x < edges[k] || x >= edges[k + 1]) continue;
      members.push_back(&point);
      sum += x;
    }
    if (members.empty()) continue;
    const std::string name = fmt::format("{} to {}{}{}", edges[k], edges[k + 1], unit.empty() ? "" : " ", unit);
    out.push_back(summarise(name, members));
    out.back().centre = sum / static_cast<double>(members.size());
  }
  return out;
}

Slope slope_of(std::span<const ResidualBin> bins) {
  double w = 0, x = 0, y = 0, xx = 0, xy = 0;
  for (const ResidualBin& bin : bins) {
    if (bin.supernovae < 5 || !(bin.offset_error > 0)) continue;
    const double weight = 1 / (bin.offset_error * bin.offset_error);
    w += weight;
    x += weight * bin.centre;
    y += weight * bin.offset;
    xx += weight * bin.centre * bin.centre;
    xy += weight * bin.centre * bin.offset;
  }
  const double determinant = w * xx - x * x;
  if (!(determinant > 0)) return {};
  return {(w * xy - x * y) / determinant, std::sqrt(w / determinant)};
}

std::string offset_sentence(std::span<const ResidualBin> bins, const std::string& along, double sigma) {
  std::string found;
  for (const ResidualBin& bin : bins) {
    if (bin.supernovae < 5 || std::abs(bin.offset) <= sigma * bin.offset_error) continue;
    found += fmt::format("{}{} ({:+.1f} ± {:.1f} mmag)", found.empty() ? "" : ", ", bin.name, 1e3 * bin.offset,
                         1e3 * bin.offset_error);
  }
  if (found.empty())
    return fmt::format("By {}, no mean residual departs from zero by more than {:.0f} σ.", along, sigma);
  return fmt::format("**By {}, the mean residual departs from zero by more than {:.0f} σ in: {}.**", along, sigma,
                     found);
}

}  // namespace thirdrung
