#pragma once

#include <string>

namespace thirdrung {

/// Numbers written with the digits that their errors allow.
///
/// An error keeps two significant digits (0.0017, 12): one would round a 0.0015 by a third. The value follows to the
/// same decimal. Minus signs are U+2212, so that columns of signed numbers line up; a missing number is an en dash.

/// Decimals that show `error` with two significant digits: 4 for 0.0017, 0 for 12. Zero or not finite: 3. At most 8.
int decimals_for(double error);

/// `value` to `decimals` places.
std::string fixed(double value, int decimals);
/// As fixed(), with a sign in front of positive numbers too.
std::string signed_fixed(double value, int decimals);
/// "0.7145 ± 0.0028"; the value alone, to four significant digits, if the error is not finite or not positive.
std::string with_error(double value, double error);
/// "+0.0012 ± 0.0008".
std::string signed_with_error(double value, double error);

/// Rounded to `digits` significant digits, to keep data files short; not finite stays so.
double rounded(double value, int digits);

/// "1 supernova", "12 supernovae".
std::string counted(long long count, const std::string& one, const std::string& many);

}  // namespace thirdrung
