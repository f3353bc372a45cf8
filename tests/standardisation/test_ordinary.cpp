#include <fmt/format.h>

#include <catch2/catch.hpp>

#include "simulated_set.h"
#include "standardisation/hierarchical.h"
#include "standardisation/ordinary.h"

using namespace thirdrung;
using thirdrung::testing::simulated_set;
using thirdrung::testing::Truth;

// Source: regression dilution, slope x width^2 / (width^2 + error^2) for uncorrelated errors (e.g. Kelly 2007, ApJ 665,
// 1489). Errors here vary from one supernova to the next and the weights with them, so that the factor is known to a
// few percent.
TEST_CASE("ordinary fit shows the known dilution, the hierarchical one does not") {
  Truth t;
  t.s_error = 0.06;
  t.c_error = 0.04;
  double ordinary_alpha = 0.0;
  double ordinary_beta = 0.0;
  double hierarchical_beta = 0.0;
  const int sets = 40;
  for (int k = 0; k < sets; ++k) {
    auto data = simulated_set(400, 500 + static_cast<std::uint64_t>(k), t);
    const StandardisationResult ordinary = fit_ordinary(data);
    ordinary_alpha += ordinary.value("alpha") / sets;
    ordinary_beta += ordinary.value("beta") / sets;
    hierarchical_beta += fit_hierarchical(data).value("beta") / sets;
    CHECK(ordinary.chi2 == Approx(396.0).margin(0.01));
  }
  INFO(fmt::format("alpha {:.3f} beta {:.3f}; hierarchical beta {:.3f}", ordinary_alpha, ordinary_beta,
                   hierarchical_beta));
  CHECK(ordinary_alpha < 0.85 * t.alpha);
  CHECK(ordinary_beta < 0.95 * t.beta);
  CHECK(hierarchical_beta == Approx(t.beta).epsilon(0.02));
}

TEST_CASE("both fits agree where s and c are measured exactly") {
  Truth t;
  t.s_error = 1e-4;
  t.c_error = 1e-4;
  const auto data = simulated_set(300, 77, t);
  const StandardisationResult ordinary = fit_ordinary(data);
  const StandardisationResult hierarchical = fit_hierarchical(data);
  for (const char* name : {"alpha", "beta", "gamma", "intercept"}) {
    CHECK(std::abs(ordinary.value(name) - hierarchical.value(name)) < 0.05 * hierarchical.error(name));
  }
}

TEST_CASE("an ordinary fit without host masses holds the step at zero") {
  auto data = simulated_set(100, 9);
  for (auto& d : data) d.host_log_mass = std::nan("");
  const StandardisationResult fit = fit_ordinary(data);
  CHECK(fit.value("gamma") == Approx(0.0).margin(1e-9));
  CHECK(fit.value("beta") > 1.0);
}
