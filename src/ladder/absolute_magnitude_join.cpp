#include "ladder/absolute_magnitude_join.h"

#include <cmath>
#include <numbers>

namespace thirdrung {

HubbleConstant join_absolute_magnitude(double a_b, double a_b_error, double m_b, double m_b_error) {
  HubbleConstant out;
  out.log10_h0 = 0.2 * m_b + a_b + 5.0;
  out.log10_h0_error = std::hypot(0.2 * m_b_error, a_b_error);
  out.h0 = std::pow(10.0, out.log10_h0);
  out.error = out.h0 * std::numbers::ln10 * out.log10_h0_error;
  const double calibration = 0.04 * m_b_error * m_b_error;
  out.share_of_calibration = calibration / (out.log10_h0_error * out.log10_h0_error);
  return out;
}

}  // namespace thirdrung
