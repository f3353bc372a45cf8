#include "light/passband.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "base/constants.h"
#include "base/error.h"

namespace thirdrung {

namespace {

using std::size_t;

/// Straight line through (x0, y0) and (x1, y1).
struct Line {
  double x0, y0, slope;
  Line(double xa, double ya, double xb, double yb) : x0(xa), y0(ya), slope((yb - ya) / (xb - xa)) {}
  double at(double x) const { return y0 + slope * (x - x0); }
};

Line segment(const std::vector<double>& x, const std::vector<double>& y, size_t upper) {
  return {x[upper - 1], y[upper - 1], x[upper], y[upper]};
}

/// ∫ g over [a, b]: exact where g is a polynomial of at most third degree (Simpson's rule).
template <typename Function>
double cubic_integral(double a, double b, const Function& g) {
  return (b - a) / 6 * (g(a) + 4 * g(0.5 * (a + b)) + g(b));
}

/// Index of the first point above x, at least 1 and at most the last one.
size_t upper_point(const std::vector<double>& grid, double x) {
  return static_cast<size_t>(std::upper_bound(grid.begin() + 1, grid.end() - 1, x) - grid.begin());
}

void check_curve(const std::string& id, const std::vector<double>& wavelength, const std::vector<double>& throughput,
                 const std::string& origin) {
  if (wavelength.size() != throughput.size()) throw std::logic_error("passband columns differ in length");
  const std::string file = origin.empty() ? fmt::format("passband {}", id) : origin;
  if (wavelength.size() < 3) {
    throw InputError({file, {}, {}}, fmt::format("passband {} has {} points", id, wavelength.size()),
                     "give at least three");
  }
  for (size_t i = 0; i < wavelength.size(); ++i) {
    if (!std::isfinite(wavelength[i]) || wavelength[i] <= 0) {
      throw InputError({file, i + 1, "wavelength"},
                       fmt::format("wavelength {} is not a positive number", wavelength[i]),
                       "mend the value or leave the row out");
    }
    if (i > 0 && wavelength[i] <= wavelength[i - 1]) {
      throw InputError({file, i + 1, "wavelength"},
                       fmt::format("wavelength {} does not increase after {}", wavelength[i], wavelength[i - 1]),
                       "sort the rows by wavelength and give each wavelength once");
    }
    if (!std::isfinite(throughput[i]) || throughput[i] < 0) {
      throw InputError({file, i + 1, "throughput"},
                       fmt::format("throughput {} is negative or not a number", throughput[i]),
                       "give a number of at least 0");
    }
  }
  if (std::all_of(throughput.begin(), throughput.end(), [](double t) { return t == 0; })) {
    throw InputError({file, {}, "throughput"}, fmt::format("every throughput of passband {} is zero", id),
                     "give a curve that lets light through");
  }
}

}  // namespace

Passband::Passband(std::string id, std::vector<double> wavelength_angstrom, std::vector<double> throughput,
                   Response response, const std::string& origin)
    : id_(std::move(id)), wavelength_(std::move(wavelength_angstrom)), throughput_(std::move(throughput)) {
  check_curve(id_, wavelength_, throughput_, origin);
  if (response == Response::energy) {
    const double largest = *std::max_element(throughput_.begin(), throughput_.end());
    for (size_t i = 0; i < throughput_.size(); ++i) throughput_[i] /= wavelength_[i];
    const double scale = largest / *std::max_element(throughput_.begin(), throughput_.end());
    for (double& value : throughput_) value *= scale;
  }

  const auto positive = [](double t) { return t > 0; };
  const auto first = std::find_if(throughput_.begin(), throughput_.end(), positive) - throughput_.begin();
  const auto after = throughput_.rend() - std::find_if(throughput_.rbegin(), throughput_.rend(), positive);
  blue_edge_ = wavelength_[static_cast<size_t>(std::max(first - 1, std::ptrdiff_t{0}))];
  red_edge_ = wavelength_[static_cast<size_t>(std::min(after, std::ssize(wavelength_) - 1))];

  double photons = 0;
  double moment = 0;
  double ab_integral = 0;  // ∫ T/λ dλ, in which a + b λ over λ is integrated in closed form.
  for (size_t i = 1; i < wavelength_.size(); ++i) {
    const Line line = segment(wavelength_, throughput_, i);
    const double a = wavelength_[i - 1];
    const double b = wavelength_[i];
    photons += cubic_integral(a, b, [&](double x) { return line.at(x) * x; });
    moment += cubic_integral(a, b, [&](double x) { return line.at(x) * x * x; });
    ab_integral += line.at(0) * std::log1p((b - a) / a) + line.slope * (b - a);
  }
  mean_wavelength_ = moment / photons;
  constexpr double planck = constants::planck_times_c_erg_angstrom / constants::speed_of_light_angstrom_s;
  photon_rate_ab_zero_ = constants::ab_zero_jansky * constants::jansky_cgs / planck * ab_integral;
}

double Passband::throughput_at(double wavelength_angstrom) const {
  if (!(wavelength_angstrom >= wavelength_.front() && wavelength_angstrom <= wavelength_.back())) return 0;
  return segment(wavelength_, throughput_, upper_point(wavelength_, wavelength_angstrom)).at(wavelength_angstrom);
}

std::pair<double, double> Passband::core_range(double fraction) const {
  if (!(fraction >= 0 && fraction < 1)) throw std::logic_error("core_range: fraction outside [0, 1)");
  std::vector<double> cumulative(wavelength_.size(), 0.0);
  const auto photons = [this](size_t upper, double to) {
    const Line line = segment(wavelength_, throughput_, upper);
    return cubic_integral(wavelength_[upper - 1], to, [&](double x) { return line.at(x) * x; });
  };
  for (size_t i = 1; i < cumulative.size(); ++i) cumulative[i] = cumulative[i - 1] + photons(i, wavelength_[i]);

  const auto wavelength_below_which = [&](double count) {
    const auto above = std::upper_bound(cumulative.begin() + 1, cumulative.end() - 1, count);
    const auto i = static_cast<size_t>(above - cumulative.begin());
    double low = wavelength_[i - 1];
    double high = wavelength_[i];
    for (int step = 0; step < 60; ++step) {  // Halved 60 times: to the last bit of a double.
      const double middle = 0.5 * (low + high);
      (cumulative[i - 1] + photons(i, middle) < count ? low : high) = middle;
    }
    return 0.5 * (low + high);
  };
  if (fraction == 0) return {blue_edge_, red_edge_};
  const double cut = 0.5 * fraction * cumulative.back();
  return {wavelength_below_which(cut), wavelength_below_which(cumulative.back() - cut)};
}

double Passband::photon_rate(const Spectrum& spectrum) const {
  if (spectrum.wavelength.size() < 2) return 0;
  double from = std::max(blue_edge_, spectrum.wavelength.front());
  const double end = std::min(red_edge_, spectrum.wavelength.back());
  if (from >= end) return 0;

  // Walk the merged grid: between two neighbouring points f and T are straight lines and f T λ is a cubic.
  size_t i = upper_point(spectrum.wavelength, from);
  size_t j = upper_point(wavelength_, from);
  double sum = 0;
  while (from < end) {
    const double to = std::min({spectrum.wavelength[i], wavelength_[j], end});
    const Line flux = segment(spectrum.wavelength, spectrum.flux, i);
    const Line throughput = segment(wavelength_, throughput_, j);
    sum += cubic_integral(from, to, [&](double x) { return flux.at(x) * throughput.at(x) * x; });
    if (spectrum.wavelength[i] <= to && i + 1 < spectrum.wavelength.size()) ++i;
    if (wavelength_[j] <= to && j + 1 < wavelength_.size()) ++j;
    from = to;
  }
  return sum / constants::planck_times_c_erg_angstrom;
}

Passband Passband::shifted(double shift_angstrom) const {
  std::vector<double> moved = wavelength_;
  for (double& value : moved) value += shift_angstrom;
  return {id_, std::move(moved), throughput_, Response::photon};
}

double ab_magnitude(const Spectrum& spectrum, const Passband& passband) {
  const double rate = passband.photon_rate(spectrum);
  if (!(rate > 0)) return std::numeric_limits<double>::infinity();
  return -2.5 * std::log10(rate / passband.photon_rate_ab_zero());
}

}  // namespace thirdrung
