#include "lightcurve/fit_probability.h"

#include <cmath>

namespace thirdrung {

namespace {

/// ln of x^a e^−x / Γ(a).
double log_front(double a, double x) {
  return a * std::log(x) - x - std::lgamma(a);
}

/// P(a, x) = x^a e^−x / Γ(a) Σ_n x^n / (a (a+1) ... (a+n)).
double lower_by_series(double a, double x) {
  double term = 1 / a;
  double sum = term;
  for (int n = 1; n < 10000 && term > sum * 1e-15; ++n) {
    term *= x / (a + n);
    sum += term;
  }
  return sum * std::exp(log_front(a, x));
}

/// Q(a, x), the continued fraction taken in its even part and summed from the front (modified Lentz method, Thompson &
/// Barnett 1986, J. Comput. Phys. 64, 490).
double upper_by_fraction(double a, double x) {
  constexpr double tiny = 1e-300;
  double b = x + 1 - a;
  double c = 1 / tiny;
  double d = 1 / b;
  double value = d;
  for (int n = 1; n < 10000; ++n) {
    const double numerator = -n * (n - a);
    b += 2;
    d = numerator * d + b;
    if (std::abs(d) < tiny) d = tiny;
    c = b + numerator / c;
    if (std::abs(c) < tiny) c = tiny;
    d = 1 / d;
    const double factor = c * d;
    value *= factor;
    if (std::abs(factor - 1) < 1e-15) break;
  }
  return value * std::exp(log_front(a, x));
}

}  // namespace

double chance_of_larger_chi2(double chi2, int dof) {
  if (dof < 1 || chi2 <= 0) return 1.0;
  const double a = 0.5 * dof;
  const double x = 0.5 * chi2;
  return x < a + 1 ? 1 - lower_by_series(a, x) : upper_by_fraction(a, x);
}

}  // namespace thirdrung
