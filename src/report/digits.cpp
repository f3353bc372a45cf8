#include "report/digits.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace thirdrung {
namespace {

const std::string minus = "−";

std::string with_true_minus(std::string text) {
  if (text.empty() || text.front() != '-') return text;
  text.erase(0, 1);
  // A number that rounds to zero carries no sign.
  if (text.find_first_of("123456789") == std::string::npos) return text;
  return minus + text;
}

}  // namespace

int decimals_for(double error) {
  if (!std::isfinite(error) || error <= 0) return 3;
  const double exponent = std::floor(std::log10(error));
  int decimals = 1 - static_cast<int>(exponent);
  // 0.0996 would be printed as 0.100: one digit too many.
  const double unit = std::pow(10.0, -decimals);
  if (std::round(error / unit) >= 100) --decimals;
  return std::clamp(decimals, 0, 8);
}

std::string fixed(double value, int decimals) {
  if (!std::isfinite(value)) return "–";
  return with_true_minus(fmt::format("{:.{}f}", value, std::max(0, decimals)));
}

std::string signed_fixed(double value, int decimals) {
  const std::string text = fixed(value, decimals);
  const bool zero = text.find_first_of("123456789") == std::string::npos;
  return value > 0 && !zero ? "+" + text : text;
}

std::string with_error(double value, double error) {
  if (!std::isfinite(value)) return "–";
  if (!std::isfinite(error) || error <= 0) return with_true_minus(fmt::format("{:.4g}", value));
  const int decimals = decimals_for(error);
  return fixed(value, decimals) + " ± " + fixed(error, decimals);
}

std::string signed_with_error(double value, double error) {
  const std::string text = with_error(value, error);
  const bool plain = text.empty() || text.starts_with(minus) || !(value > 0);
  return plain ? text : "+" + text;
}

double rounded(double value, int digits) {
  if (!std::isfinite(value) || value == 0) return value;
  const double power = static_cast<double>(digits) - 1 - std::floor(std::log10(std::abs(value)));
  if (power < 0) return std::round(value * std::pow(10.0, power)) / std::pow(10.0, power);
  const double scale = std::pow(10.0, power);
  return std::isfinite(scale) ? std::round(value * scale) / scale : value;
}

std::string counted(long long count, const std::string& one, const std::string& many) {
  return fmt::format("{} {}", count, count == 1 ? one : many);
}

}  // namespace thirdrung
