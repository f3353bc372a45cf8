#pragma once

#include <span>
#include <vector>

namespace thirdrung {

/// Straight line through weighted points, with the error of its slope from the stated errors of y.
struct Trend {
  double slope = 0, slope_error = 0;
  double pivot = 0;           ///< Weighted mean of x.
  double value_at_pivot = 0;  ///< Weighted mean of y.
  std::size_t points = 0;     ///< Points with finite x, y and positive error; below 3 the slope is NaN.
};
/// Weighted least squares of y on x (Bevington & Robinson, Data Reduction, section 6.3, about the mean). Points that
/// are not finite are left out.
Trend fit_trend(std::span<const double> x, std::span<const double> y, std::span<const double> y_error);

/// Slope that fit_trend() gives on average where y does not depend on the true x but shares the errors of measurement:
/// Σ w cov(error of x, error of y) / Σ w (x - mean)², the bias of a regression with errors in x (Fuller 1987,
/// Measurement Error Models, section 1.1). Points without a covariance are left out.
double slope_of_shared_errors(std::span<const double> x, std::span<const double> y_error,
                              std::span<const double> covariance);

/// Weighted mean of y among points of neighbouring x.
struct BinnedMean {
  double low = 0, high = 0;  ///< Range of x of its points.
  double x = 0;              ///< Weighted mean of their x.
  double mean = 0, error = 0;
  std::size_t points = 0;
};
/// At most `bins` bins of equal numbers of points, at least five points each; none for fewer than ten points.
std::vector<BinnedMean> binned_means(std::span<const double> x, std::span<const double> y,
                                     std::span<const double> y_error, std::size_t bins);

}  // namespace thirdrung
