#include "lightcurve/scan.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include "base/constants.h"

namespace thirdrung {

namespace {

constexpr double step_days = 3;  // Rest frame.
constexpr std::array<double, 4> stretches = {0.7, 0.85, 1.0, 1.15};
constexpr double flux_error_added = 0.1;
constexpr double amplitude_scatter = 0.4;
constexpr std::size_t most_starts = 3;

/// One band's flux at m_B = 0 for one stretch, straight between days.
class ScanCurve {
 public:
  ScanCurve(const BandTable& table, double s) : first_(table.nodes().phases().front()) {
    const PhaseNodes& nodes = table.nodes();
    const auto& phase = nodes.phases();
    std::vector<double> at_nodes = table.log_flux_at_nodes(s, 0.0);
    for (double& f : at_nodes) f = std::exp(f);
    days_ = std::floor(phase.back() - first_);
    flux_.reserve(static_cast<std::size_t>(days_) + 1);
    for (double day = 0; day <= days_; ++day) {
      const double q = first_ + day;
      const std::size_t i = nodes.interval(q);
      flux_.push_back(at_nodes[i] + (at_nodes[i + 1] - at_nodes[i]) * (q - phase[i]) / (phase[i + 1] - phase[i]));
    }
  }
  double at(double q) const {
    const double day = q - first_;
    if (day < 0) return 0.0;
    // The late decline of about 0.02 mag a day.
    if (day >= days_) return flux_.back() / (1 + 0.02 * (day - days_));
    const auto i = static_cast<int>(day);
    const double* f = flux_.data() + i;
    return f[0] + (f[1] - f[0]) * (day - i);
  }

 private:
  double first_;
  double days_;
  std::vector<double> flux_;  ///< Every day from first_ on.
};

struct Amplitude {
  double value = 0;
  double chi2 = std::numeric_limits<double>::infinity();
};

/// Sums over one band's observations at one t_0.
struct BandSums {
  double dd = 0;
  double df = 0;
  double ff = 0;
};

/// Common amplitude of all bands and χ²; infinite unless the amplitude is positive.
Amplitude common_amplitude(const std::vector<BandSums>& bands) {
  double df = 0;
  double ff = 0;
  for (const BandSums& b : bands) {
    df += b.df;
    ff += b.ff;
  }
  Amplitude out;
  if (!(df > 0) || !(ff > 0)) return out;
  double amplitude = df / ff;
  for (int pass = 0; pass < 2; ++pass) {
    const double scatter = amplitude_scatter * amplitude;
    double sum = 0;
    double weights = 0;
    for (const BandSums& b : bands) {
      if (!(b.ff > 0)) continue;
      const double weight = 1 / (1 / b.ff + scatter * scatter);
      sum += weight * b.df / b.ff;
      weights += weight;
    }
    amplitude = sum / weights;
    if (!(amplitude > 0)) return out;
  }
  const double scatter = amplitude_scatter * amplitude;
  double chi2 = 0;
  for (const BandSums& b : bands) {
    chi2 += b.dd;
    if (!(b.ff > 0)) continue;
    const double own = b.df / b.ff;
    chi2 += (own - amplitude) * (own - amplitude) / (1 / b.ff + scatter * scatter) - own * b.df;
  }
  out.value = amplitude;
  out.chi2 = chi2;
  return out;
}

class Scan {
 public:
  Scan(const ObservedBands& observed) : observed_(observed), sums_(observed.bands.size()) {
    for (const Observation& o : observed.observations) {
      const double added = flux_error_added * o.flux;
      weight_.push_back(1 / (o.variance + added * added));
    }
    for (const double s : stretches) {
      auto& curves = curves_.emplace_back();
      for (const ObservedBand& band : observed.bands) curves.emplace_back(band.table, s);
    }
  }

  /// The best stretch at one date.
  Start at(double t_0) {
    Start best;
    best.chi2 = std::numeric_limits<double>::infinity();
    for (std::size_t k = 0; k < stretches.size(); ++k) {
      const double q_per_day = 1 / ((1 + observed_.z) * stretches[k]);
      std::fill(sums_.begin(), sums_.end(), BandSums{});
      for (std::size_t i = 0; i < weight_.size(); ++i) {
        const Observation& o = observed_.observations[i];
        const double f = curves_[k][o.band].at((o.time - t_0) * q_per_day);
        const double weighted = weight_[i] * f;
        BandSums& sums = sums_[o.band];
        sums.dd += weight_[i] * o.flux * o.flux;
        sums.df += weighted * o.flux;
        sums.ff += weighted * f;
      }
      const Amplitude amplitude = common_amplitude(sums_);
      if (amplitude.chi2 < best.chi2) {
        best.chi2 = amplitude.chi2;
        best.at << t_0, -std::log(amplitude.value) / constants::ln_flux_per_mag, stretches[k], 0.0;
      }
    }
    return best;
  }

 private:
  const ObservedBands& observed_;
  std::vector<double> weight_;
  std::vector<BandSums> sums_;
  std::vector<std::vector<ScanCurve>> curves_;
};

}  // namespace

Window window_of(const ObservedBands& observed, const FitOptions& options) {
  const double stretch = 1 + observed.z;
  return {-observed.half_span - options.window_before * stretch, observed.half_span + options.window_after * stretch};
}

std::vector<Start> scan(const ObservedBands& observed, const FitOptions& options, const std::optional<double>& guess) {
  Scan scan(observed);
  const Window window = window_of(observed, options);
  const auto steps = static_cast<int>(std::ceil((window.last - window.first) / (step_days * (1 + observed.z))));
  std::vector<Start> tried;
  for (int i = 1; i < steps; ++i) tried.push_back(scan.at(window.first + (window.last - window.first) * i / steps));
  std::vector<Start> minima;
  for (std::size_t i = 0; i < tried.size(); ++i) {
    if (!std::isfinite(tried[i].chi2)) continue;
    const bool below_left = i == 0 || !(tried[i - 1].chi2 <= tried[i].chi2);
    const bool below_right = i + 1 == tried.size() || !(tried[i + 1].chi2 < tried[i].chi2);
    if (below_left && below_right) minima.push_back(tried[i]);
  }
  if (guess && *guess > window.first && *guess < window.last) {
    const Start there = scan.at(*guess);
    if (std::isfinite(there.chi2)) minima.push_back(there);
  }
  std::stable_sort(minima.begin(), minima.end(), [](const Start& a, const Start& b) { return a.chi2 < b.chi2; });
  std::vector<Start> out;
  for (const Start& start : minima) {
    const double per_epoch = minima.front().chi2 / static_cast<double>(observed.observations.size());
    if (out.size() == most_starts || start.chi2 > minima.front().chi2 + 9 * std::max(1.0, per_epoch)) break;
    // The guess beside a minimum adds nothing.
    const bool is_near = std::any_of(out.begin(), out.end(), [&](const Start& other) {
      return std::abs(other.at[0] - start.at[0]) < 1.5 * step_days * (1 + observed.z);
    });
    if (!is_near) out.push_back(start);
  }
  return out;
}

}  // namespace thirdrung
