#pragma once

namespace thirdrung {

/// Chance that χ² with `dof` degrees of freedom exceeds `chi2`: the regularised incomplete gamma function
/// Q(dof/2, chi2/2) (Abramowitz & Stegun 1964, 26.4.19), by its series 6.5.29 below dof + 2 and its continued fraction
/// 6.5.31 above, to 1e-12. 1 if dof < 1.
double chance_of_larger_chi2(double chi2, int dof);

}  // namespace thirdrung
