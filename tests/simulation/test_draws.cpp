#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <vector>

#include "base/constants.h"
#include "sample/redshift_frames.h"
#include "simulation/draw_supernova.h"
#include "simulation/small_survey.h"

using namespace thirdrung;
using thirdrung::testing::small_survey;

namespace {

struct Moments {
  double mean = 0, width = 0;
};

template <typename Draw>
Moments moments(int count, const Draw& draw) {
  double sum = 0;
  double squares = 0;
  for (int i = 0; i < count; ++i) {
    const double x = draw(i);
    sum += x;
    squares += x * x;
  }
  const double mean = sum / count;
  return {mean, std::sqrt(squares / count - mean * mean)};
}

std::vector<SupernovaTruth> many(const SimulationOptions& options, std::uint64_t count) {
  const SimulatedSurvey& survey = options.surveys.front();
  const VolumeRedshifts redshifts(survey.z_min, survey.z_max, options.relation.expansion);
  std::vector<SupernovaTruth> out;
  for (std::uint64_t i = 0; i < count; ++i) {
    RandomStream stream(5, {i});
    out.push_back(draw_supernova(options, survey, redshifts, stream));
  }
  return out;
}

/// Largest distance of the empirical distribution from the given one, times √n (Kolmogorov 1933).
template <typename Distribution>
double distance(std::vector<double> sample, const Distribution& below) {
  std::sort(sample.begin(), sample.end());
  const auto n = static_cast<double>(sample.size());
  double largest = 0;
  for (std::size_t i = 0; i < sample.size(); ++i) {
    const double wanted = below(sample[i]);
    largest = std::max(
        {largest, std::abs(static_cast<double>(i) / n - wanted), std::abs(static_cast<double>(i + 1) / n - wanted)});
  }
  return largest * std::sqrt(n);
}

// Limit of the distance times √n that chance exceeds once in 10^4 samples: 2 exp(−2 x²) = 1e-4 (Kolmogorov's series).
constexpr double unlikely = 2.23;

}  // namespace

TEST_CASE("random streams are uniform, normal and independent of each other") {
  std::vector<double> uniform;
  std::vector<double> normal;
  std::vector<double> firsts;
  double product = 0;
  RandomStream a(1, {1, 2});
  RandomStream b(1, {2, 1});
  for (std::uint64_t i = 0; i < 20000; ++i) {
    uniform.push_back(a.uniform());
    normal.push_back(b.normal());
    RandomStream one(1, {3, i});
    firsts.push_back(one.uniform());
    product += (uniform.back() - 0.5) * normal.back();
  }
  const auto normal_below = [](double x) { return 0.5 * std::erfc(-x / std::sqrt(2.0)); };
  CHECK(distance(uniform, [](double x) { return x; }) < unlikely);
  CHECK(distance(firsts, [](double x) { return x; }) < unlikely);
  CHECK(distance(normal, normal_below) < unlikely);
  CHECK(std::abs(product) / std::sqrt(20000.0 / 12.0) < 4);
  // The same on every machine: fixes the generator for good.
  RandomStream fixed(42, {7});
  CHECK(RandomStream(42, {7}).uniform() == fixed.uniform());
  CHECK(RandomStream(42, {8}).uniform() != RandomStream(42, {7}).uniform());
  CHECK(RandomStream(43, {7}).uniform() != RandomStream(42, {7}).uniform());
}

TEST_CASE("stretch, colour and host mass have the moments of their distributions") {
  SimulationOptions options = small_survey(1, 1);
  SimulatedPopulation& p = options.population;
  p.s_min = 0.4;
  p.s_max = 1.9;
  p.c_max = 3;
  const auto truths = many(options, 20000);
  const double n = std::sqrt(20000.0);
  // Split normal distribution: mean = peak + sqrt(2/π)(above − below), variance (1 − 2/π)(above − below)² + above below
  // (John 1982, Commun. Stat. Theory Methods 11, 879; from memory, and re-derived). Tolerances: four errors of a mean.
  const Moments s = moments(20000, [&](int i) { return truths[static_cast<std::size_t>(i)].s; });
  const double apart = p.s_width_above - p.s_width_below;
  const double s_width = std::sqrt((1 - 2 / constants::pi) * apart * apart + p.s_width_above * p.s_width_below);
  CHECK(std::abs(s.mean - (p.s_peak + std::sqrt(2 / constants::pi) * apart)) < 4 * s_width / n);
  CHECK(s.width == Approx(s_width).epsilon(0.03));
  // Gaussian plus exponential: means and variances add.
  const Moments c = moments(20000, [&](int i) { return truths[static_cast<std::size_t>(i)].c; });
  const double c_width = std::hypot(p.c_width, p.c_tail);
  CHECK(std::abs(c.mean - (p.c_mean + p.c_tail)) < 4 * c_width / n);
  CHECK(c.width == Approx(c_width).epsilon(0.04));
  const Moments mass = moments(20000, [&](int i) { return truths[static_cast<std::size_t>(i)].host_log_mass; });
  CHECK(std::abs(mass.mean - p.mass_mean) < 4 * p.mass_width / n);
}

TEST_CASE("redshifts fill the volume, positions the sphere") {
  SimulationOptions options = small_survey(1, 1);
  SimulatedSurvey& survey = options.surveys.front();
  survey.z_min = 0.003;
  survey.z_max = 0.01;
  survey.footprint.galactic_latitude_min = 0;
  options.milky_way.ebv_at_pole = 0;
  const auto truths = many(options, 20000);
  std::vector<double> z;
  std::vector<double> sine;
  for (const SupernovaTruth& truth : truths) {
    z.push_back(truth.z_flow);
    sine.push_back(std::sin(truth.dec * constants::degree));
  }
  // So near that volume is z³ to 1%: far below what 20000 can tell.
  const double low = std::pow(survey.z_min, 3);
  CHECK(distance(z, [&](double x) { return (x * x * x - low) / (1e-6 - low); }) < unlikely);
  CHECK(distance(sine, [](double x) { return 0.5 * (1 + x); }) < unlikely);
}

TEST_CASE("the redshift distribution further out is the integral over shells") {
  const Expansion expansion;
  const VolumeRedshifts redshifts(0.1, 0.9, expansion);
  // Midpoint sum written out here: 4π d_C² dd_C / (1 + z).
  const auto mass = [&](double to) {
    double sum = 0;
    const int steps = 20000;
    for (int i = 0; i < steps; ++i) {
      const double width = (to - 0.1) / steps;
      const double z = 0.1 + (i + 0.5) * width;
      const double slope = (comoving_distance(z + 1e-5, expansion) - comoving_distance(z - 1e-5, expansion)) / 2e-5;
      sum += std::pow(comoving_distance(z, expansion), 2) * slope / (1 + z) * width;
    }
    return sum;
  };
  const double whole = mass(0.9);
  for (const double part : {0.01, 0.3, 0.75, 0.99}) {
    CHECK(mass(redshifts.quantile(part)) / whole == Approx(part).epsilon(1e-4));
  }
  CHECK(redshifts.quantile(0) == Approx(0.1));
  CHECK(redshifts.quantile(1) == Approx(0.9));
}

TEST_CASE("velocities scatter as told and undo with the redshift frames of an analysis") {
  SimulationOptions options = small_survey(1, 1);
  options.velocities.sigma_v = 250;
  options.velocities.bulk_speed = 300;
  options.velocities.bulk_direction = {280, 10};
  const auto truths = many(options, 4000);
  const Moments v = moments(4000, [&](int i) {
    const SupernovaTruth& truth = truths[static_cast<std::size_t>(i)];
    return truth.v_pec - truth.bulk_v_pec;
  });
  CHECK(std::abs(v.mean) < 4 * 250 / std::sqrt(4000.0));
  CHECK(v.width == Approx(250).epsilon(0.05));
  double steepest = 0;
  for (const SupernovaTruth& truth : truths) {
    steepest = std::max(steepest, std::abs(truth.bulk_v_pec));
    Supernova row;
    row.ra = truth.ra;
    row.dec = truth.dec;
    row.z_helio = truth.z_helio;
    row.v_pec = truth.v_pec;
    RedshiftOptions frames;
    frames.velocity = VelocitySource::column;
    const Redshifts z = redshifts_of(row, frames);
    CHECK(std::abs(z.z_flow - truth.z_flow) < 1e-12);
    CHECK(std::abs(z.z_cmb - truth.z_cmb) < 1e-12);
  }
  CHECK(steepest < 300.001);
  CHECK(steepest > 290);
}

TEST_CASE("magnitudes follow the relation with the stated intercept") {
  SimulationOptions options = small_survey(1, 1);
  const SimulatedRelation& relation = options.relation;
  for (const SupernovaTruth& truth : many(options, 200)) {
    const double step = truth.host_log_mass > 10 ? 0.5 : -0.5;
    const double standardised =
        truth.m_b - truth.intrinsic + relation.alpha * (truth.s - 1) - relation.beta * truth.c + relation.gamma * step;
    // Riess et al. 2016, eq. 5, with the distance of the observed redshift: the definition of a_B.
    const double a_b =
        log_expansion_term(truth.z_flow) + std::log10((1 + truth.z_helio) / (1 + truth.z_flow)) - 0.2 * standardised;
    CHECK(std::abs(a_b - relation.a_b()) < 1e-12);
  }
  // log10 70 + 0.2 × 19.25 − 5.
  CHECK(relation.a_b() == Approx(0.69509804).epsilon(1e-7));
}
