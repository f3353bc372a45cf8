#include "base/chi_square.h"

#include <cmath>
#include <limits>

namespace thirdrung {

namespace {

/// P(a, x) by the series, which converges fast for x < a + 1.
double lower_by_series(double a, double x) {
  double term = 1.0 / a;
  double sum = term;
  for (double n = a + 1.0; term > 1e-17 * sum; n += 1.0) {
    term *= x / n;
    sum += term;
  }
  return sum * std::exp(a * std::log(x) - x - std::lgamma(a));
}

/// Q(a, x) by the continued fraction, evaluated forwards (modified Lentz), for x >= a + 1.
double upper_by_fraction(double a, double x) {
  const double tiny = std::numeric_limits<double>::min() / std::numeric_limits<double>::epsilon();
  double b = x + 1.0 - a;
  double c = 1.0 / tiny;
  double d = 1.0 / b;
  double h = d;
  for (int i = 1; i < 100000; ++i) {
    const double an = -i * (i - a);
    b += 2.0;
    d = an * d + b;
    if (std::abs(d) < tiny) d = tiny;
    c = b + an / c;
    if (std::abs(c) < tiny) c = tiny;
    d = 1.0 / d;
    const double step = d * c;
    h *= step;
    if (std::abs(step - 1.0) < 1e-15) break;
  }
  return h * std::exp(a * std::log(x) - x - std::lgamma(a));
}

}  // namespace

double chi_square_survival(double chi2, int dof) {
  if (dof <= 0 || chi2 <= 0.0) return 1.0;
  const double a = 0.5 * dof;
  const double x = 0.5 * chi2;
  return x < a + 1.0 ? 1.0 - lower_by_series(a, x) : upper_by_fraction(a, x);
}

}  // namespace thirdrung
