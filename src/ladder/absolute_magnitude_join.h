#pragma once

namespace thirdrung {

/// H0 from an intercept and a calibrated absolute magnitude.
struct HubbleConstant {
  double h0 = 0.0;     ///< [km/s/Mpc].
  double error = 0.0;  ///< 1 sigma.
  double log10_h0 = 0.0, log10_h0_error = 0.0;
  double share_of_calibration = 0.0;  ///< Of the variance of log10 H0, from M_B.
};

/// log10 H0 = 0.2 M_B + a_B + 5 (Riess et al. 2016, ApJ 826, 56, eq. 9), errors of the two independent.
/// @param m_b absolute B magnitude of a supernova of s = 1, c = 0 in the middle of the host step [mag].
HubbleConstant join_absolute_magnitude(double a_b, double a_b_error, double m_b, double m_b_error);

}  // namespace thirdrung
