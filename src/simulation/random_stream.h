#pragma once

#include <cmath>
#include <cstdint>
#include <initializer_list>

#include "base/constants.h"

namespace thirdrung {

/// Random numbers that depend on a seed and on what they are for, and on nothing else: every supernova draws from a
/// stream of its own, so that a simulation has the same bytes on any number of threads and any platform.
///
/// SplitMix64 (Steele, Lea & Flood 2014, OOPSLA, p. 453), a counter run through a mixing function.
class RandomStream {
 public:
  /// @param purpose numbers that tell this stream from every other one of the same seed.
  RandomStream(std::uint64_t seed, std::initializer_list<std::uint64_t> purpose) : counter_(mixed(seed + step)) {
    for (const std::uint64_t part : purpose) counter_ = mixed(counter_ ^ mixed(part + step));
  }

  /// In (0, 1).
  double uniform() { return (static_cast<double>(next() >> 11) + 0.5) * 0x1p-53; }
  double uniform(double low, double high) { return low + (high - low) * uniform(); }
  /// Standard normal (Box & Muller 1958, Ann. Math. Stat. 29, 610).
  double normal() {
    const double radius = std::sqrt(-2.0 * std::log(uniform()));
    return radius * std::cos(2.0 * constants::pi * uniform());
  }
  /// Exponential of the given mean.
  double exponential(double mean) { return -mean * std::log(uniform()); }

 private:
  static constexpr std::uint64_t step = 0x9E3779B97F4A7C15u;

  static std::uint64_t mixed(std::uint64_t x) {
    x = (x ^ (x >> 30)) * 0xBF58476D1CE4E5B9u;
    x = (x ^ (x >> 27)) * 0x94D049BB133111EBu;
    return x ^ (x >> 31);
  }
  std::uint64_t next() {
    counter_ += step;
    return mixed(counter_);
  }

  std::uint64_t counter_;
};

}  // namespace thirdrung
