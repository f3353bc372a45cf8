#include "light/dust_law.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "base/text.h"

namespace thirdrung {

namespace {

using std::size_t;

template <size_t N>
double polynomial(const std::array<double, N>& coefficients, double x) {
  double sum = 0;
  for (size_t i = N; i-- > 0;) sum = sum * x + coefficients[i];
  return sum;
}

// ---- Cardelli, Clayton & Mathis 1989 with O'Donnell 1994 -------------------------------------------------------

/// A(λ)/A(V) at x = 1/λ [µm⁻¹]: a(x) + b(x)/R_V.
double odonnell94(double x, double r_v) {
  double a = 0;
  double b = 0;
  if (x < 1.1) {  // Infrared: CCM eqs. 2a, 2b.
    const double power = std::pow(x, 1.61);
    a = 0.574 * power;
    b = -0.527 * power;
  } else if (x < 3.3) {  // Optical: O'Donnell eqs. 3a, 3b.
    constexpr std::array<double, 9> a_terms = {1.0, 0.104, -0.609, 0.701, 1.137, -1.718, -0.827, 1.647, -0.505};
    constexpr std::array<double, 9> b_terms = {0.0, 1.952, 2.908, -3.989, -7.985, 11.102, 5.491, -10.805, 3.347};
    a = polynomial(a_terms, x - 1.82);
    b = polynomial(b_terms, x - 1.82);
  } else if (x < 8.0) {  // Ultraviolet: CCM eqs. 4a, 4b.
    a = 1.752 - 0.316 * x - 0.104 / ((x - 4.67) * (x - 4.67) + 0.341);
    b = -3.090 + 1.825 * x + 1.206 / ((x - 4.62) * (x - 4.62) + 0.263);
    if (x >= 5.9) {
      const double y = x - 5.9;
      a += y * y * (-0.04473 - 0.009779 * y);
      b += y * y * (0.2130 + 0.1207 * y);
    }
  } else {  // Far ultraviolet: CCM eqs. 5a, 5b.
    constexpr std::array<double, 4> a_terms = {-1.073, -0.628, 0.137, -0.070};
    constexpr std::array<double, 4> b_terms = {13.670, 4.257, -0.420, 0.374};
    a = polynomial(a_terms, x - 8.0);
    b = polynomial(b_terms, x - 8.0);
  }
  return a + b / r_v;
}

// ---- Fitzpatrick 1999 -----------------------------------------------------------------------------------------

/// Where the ultraviolet formula takes over from the spline [µm⁻¹]: 2700 Å.
constexpr double ultraviolet_start = 1e4 / 2700.0;

/// Anchors at λ = ∞, 26500, 12200, 6000, 5470, 4670, 4110, 2700 and 2600 Å (Table 3).
constexpr std::array<double, 9> anchor_knots = {0.0,         1e4 / 26500., 1e4 / 12200., 1e4 / 6000., 1e4 / 5470.,
                                                1e4 / 4670., 1e4 / 4110.,  1e4 / 2700.,  1e4 / 2600.};

/// A(λ)/E(B−V) of the ultraviolet formula (Fitzpatrick & Massa 1990; coefficients of Fitzpatrick 1999, appendix).
double fitzpatrick99_ultraviolet(double x, double r_v) {
  constexpr double x_bump = 4.596;
  constexpr double gamma = 0.99;
  constexpr double c3 = 3.23;
  constexpr double c4 = 0.41;
  const double c2 = -0.824 + 4.717 / r_v;
  const double c1 = 2.030 - 3.007 * c2;
  const double away = x * x - x_bump * x_bump;
  const double bump = x * x / (away * away + x * x * gamma * gamma);
  const double y = std::max(x - 5.9, 0.0);
  const double far_rise = y * y * (0.5392 + 0.05644 * y);
  return c1 + c2 * x + c3 * bump + c4 * far_rise + r_v;
}

/// A(λ)/E(B−V) at the anchors (Table 4).
std::array<double, 9> fitzpatrick99_anchors(double r_v) {
  return {0.0,
          0.265 * r_v / 3.1,
          0.829 * r_v / 3.1,
          -0.426 + 1.0044 * r_v,
          -0.050 + 1.0016 * r_v,
          0.701 + 1.0016 * r_v,
          1.208 + 1.0032 * r_v - 0.00033 * r_v * r_v,
          fitzpatrick99_ultraviolet(anchor_knots[7], r_v),
          fitzpatrick99_ultraviolet(anchor_knots[8], r_v)};
}

/// Second derivatives of the natural cubic spline through the anchors (tridiagonal system, solved by elimination).
std::array<double, 9> natural_spline_curvatures(const std::array<double, 9>& values) {
  std::array<double, 9> curvature = {};
  std::array<double, 9> ratio = {};
  for (size_t i = 1; i + 1 < values.size(); ++i) {
    const double before = anchor_knots[i] - anchor_knots[i - 1];
    const double after = anchor_knots[i + 1] - anchor_knots[i];
    const double right = 6 * ((values[i + 1] - values[i]) / after - (values[i] - values[i - 1]) / before);
    const double pivot = 2 * (before + after) - before * ratio[i - 1];
    ratio[i] = after / pivot;
    curvature[i] = (right - before * curvature[i - 1]) / pivot;
  }
  for (size_t i = values.size() - 1; i-- > 1;) curvature[i] -= ratio[i] * curvature[i + 1];
  return curvature;
}

double spline_at(double x, const std::array<double, 9>& values, const std::array<double, 9>& curvatures) {
  const auto above = std::upper_bound(anchor_knots.begin() + 1, anchor_knots.end() - 1, x);
  const auto i = static_cast<size_t>(above - anchor_knots.begin());
  const double step = anchor_knots[i] - anchor_knots[i - 1];
  const double right = (x - anchor_knots[i - 1]) / step;
  const double left = 1 - right;
  return left * values[i - 1] + right * values[i] +
         step * step / 6 *
             ((left * left * left - left) * curvatures[i - 1] + (right * right * right - right) * curvatures[i]);
}

}  // namespace

DustLaw dust_law_from_name(const std::string& name, const Place& place) {
  if (name == "odonnell94") return DustLaw::odonnell94;
  if (name == "fitzpatrick99") return DustLaw::fitzpatrick99;
  const std::vector<std::string> known = {"odonnell94", "fitzpatrick99"};
  const std::string near = nearest_word(name, known);
  throw InputError(
      place, fmt::format("unknown dust law \"{}\"", name),
      near.empty() ? "write \"odonnell94\" or \"fitzpatrick99\"" : fmt::format("did you mean \"{}\"?", near));
}

std::string name_of(DustLaw law) {
  return law == DustLaw::odonnell94 ? "odonnell94" : "fitzpatrick99";
}

Extinction::Extinction(DustLaw law, double r_v) : law_(law), r_v_(r_v) {
  if (!(r_v >= 2 && r_v <= 6)) {
    throw InputError({}, fmt::format("R_V = {} of the dust law is outside 2 to 6", r_v),
                     "the published laws hold only there; 3.1 is the mean of the Milky Way");
  }
  if (law_ == DustLaw::fitzpatrick99) {
    spline_values_ = fitzpatrick99_anchors(r_v_);
    spline_curvatures_ = natural_spline_curvatures(spline_values_);
  }
}

double Extinction::relative(double wavelength_angstrom) const {
  if (law_ == DustLaw::odonnell94) return odonnell94(1e4 / std::clamp(wavelength_angstrom, 1000.0, 33000.0), r_v_);
  const double x = 1e4 / std::clamp(wavelength_angstrom, 910.0, 60000.0);
  const double per_ebv =
      x > ultraviolet_start ? fitzpatrick99_ultraviolet(x, r_v_) : spline_at(x, spline_values_, spline_curvatures_);
  return per_ebv / r_v_;
}

double Extinction::magnitudes(double wavelength_angstrom, double ebv) const {
  return relative(wavelength_angstrom) * r_v_ * ebv;
}

}  // namespace thirdrung
