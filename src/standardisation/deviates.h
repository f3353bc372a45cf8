#pragma once

#include <cmath>
#include <cstddef>
#include <cstdint>
#include <random>

#include "base/constants.h"

namespace thirdrung {

/// Random numbers from a seed, the same on every platform (the standard library's distributions are not).
class Deviates {
 public:
  explicit Deviates(std::uint64_t seed) : engine_(seed) {}
  /// In (0, 1).
  double uniform() { return (static_cast<double>(engine_() >> 11) + 0.5) * 0x1p-53; }
  /// Standard normal (Box & Muller 1958, Ann. Math. Stat. 29, 610).
  double normal() {
    const double radius = std::sqrt(-2.0 * std::log(uniform()));
    return radius * std::cos(2.0 * constants::pi * uniform());
  }
  /// In 0 ... count - 1.
  std::size_t below(std::size_t count) {
    const auto k = static_cast<std::size_t>(uniform() * static_cast<double>(count));
    return k < count ? k : count - 1;
  }

 private:
  std::mt19937_64 engine_;
};

}  // namespace thirdrung
