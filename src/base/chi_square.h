#pragma once

namespace thirdrung {

/// Probability that a chi-square variable of `dof` degrees of freedom exceeds `chi2`: the regularised incomplete gamma
/// function Q(dof/2, chi2/2) by its series or continued fraction (Abramowitz & Stegun 1964, eqs. 6.5.29 and 6.5.31). 1
/// for dof <= 0.
double chi_square_survival(double chi2, int dof);

}  // namespace thirdrung
