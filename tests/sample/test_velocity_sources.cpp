// What the built-in infall model is worth on real supernovae, beside published peculiar velocities.
#include <fmt/format.h>

#include <array>
#include <catch2/catch.hpp>
#include <cmath>
#include <map>

#include "real_data.h"
#include "sample/read_supernovae.h"
#include "sample/redshift_frames.h"
#include "sky/expansion.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

struct Published {
  Supernova supernova;  ///< With the published redshift as that of the group.
  double z_cmb = 0.0;
  double z_flow = 0.0;
  double v_pec = 0.0;
  double magnitude = 0.0;  ///< Standardised.
};

/// Published supernovae with a place in our tables, each once.
std::vector<Published> published_supernovae(const std::filesystem::path& data, double z_low, double z_high) {
  std::map<std::string, Supernova> places;
  for (const auto& entry : std::filesystem::directory_iterator(data / "supernovae")) {
    for (const Supernova& s : read_supernovae(read_table(entry.path()), "").supernovae) places[s.name] = s;
  }
  const Table table = read_table(data / "published" / "supernovae.ecsv");
  const auto names = table.strings("supernova");
  const auto z_helio = table.reals("z_helio");
  std::vector<Published> all;
  for (std::size_t i = 0; i < names.size(); ++i) {
    const auto found = places.find(names[i]);
    if (found == places.end() || z_helio[i] < z_low || z_helio[i] > z_high) continue;
    found->second.z_group = z_helio[i];
    all.push_back({found->second, table.reals("z_cmb")[i], table.reals("z_flow")[i], table.reals("v_pec")[i],
                   table.reals("m_b_standardised")[i]});
    places.erase(found);
  }
  return all;
}

Redshifts by_infall(const Supernova& supernova, InfallScheme scheme) {
  RedshiftOptions options;
  options.velocity = VelocitySource::infall;
  options.infall.scheme = scheme;
  return redshifts_of(supernova, options);
}

double mean(const std::vector<double>& x) {
  double sum = 0.0;
  for (const double v : x) sum += v;
  return sum / static_cast<double>(x.size());
}

double covariance(const std::vector<double>& x, const std::vector<double>& y) {
  std::vector<double> products;
  for (std::size_t i = 0; i < x.size(); ++i) products.push_back((x[i] - mean(x)) * (y[i] - mean(y)));
  return mean(products);
}

/// Scatter of standardised magnitudes about the expansion [mag], outliers beyond 0.6 mag of the mean left out.
double scatter(const std::vector<Published>& all, const std::vector<double>& z) {
  std::vector<double> residuals;
  for (std::size_t i = 0; i < all.size(); ++i) residuals.push_back(all[i].magnitude - 5.0 * log_expansion_term(z[i]));
  const double centre = mean(residuals);
  std::erase_if(residuals, [&](double r) { return std::abs(r - centre) > 0.6; });
  return std::sqrt(covariance(residuals, residuals));
}

}  // namespace

// Source: v_pec of Peterson et al. 2022 (ApJ 938, 112), from a reconstruction of the density field. The infall model
// knows three attractors only, so no closer agreement is to be expected than that both see the same flow where the
// attractors dominate it.
TEST_CASE("the infall model goes with published peculiar velocities nearby", "[realdata][published]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  std::vector<double> ours;
  std::vector<double> theirs;
  for (const Published& p : published_supernovae(data, 0.005, 0.015)) {
    ours.push_back(by_infall(p.supernova, InfallScheme::cmb_frame).v_pec);
    theirs.push_back(p.v_pec);
  }
  const double r = covariance(ours, theirs) / std::sqrt(covariance(ours, ours) * covariance(theirs, theirs));
  WARN(fmt::format("infall model against published v_pec: {} supernovae, correlation {:.2f}", ours.size(), r));
  CHECK(ours.size() > 30);
  CHECK(r > 0.4);
}

// The figures of docs/methods/sky.md: why the CMB-frame scheme is the default.
TEST_CASE("the default scheme scatters less than the published one in the Hubble flow", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const auto all = published_supernovae(data, 0.0233, 0.15);
  std::vector<double> cmb;
  std::vector<double> flow;
  std::vector<double> in_cmb_frame;
  std::vector<double> as_published;
  for (const Published& p : all) {
    cmb.push_back(p.z_cmb);
    flow.push_back(p.z_flow);
    in_cmb_frame.push_back(by_infall(p.supernova, InfallScheme::cmb_frame).z_flow);
    as_published.push_back(by_infall(p.supernova, InfallScheme::as_published).z_flow);
  }
  WARN(fmt::format(
      "{} supernovae, scatter in mag: z_cmb {:.4f}, published velocities {:.4f}, cmb_frame {:.4f}, as_published {:.4f}",
      all.size(), scatter(all, cmb), scatter(all, flow), scatter(all, in_cmb_frame), scatter(all, as_published)));
  CHECK(scatter(all, in_cmb_frame) < scatter(all, as_published));
  CHECK(scatter(all, flow) < scatter(all, cmb));
}

TEST_CASE("what the attractors leave unexplained of our motion is as documented") {
  const SunMotion sun;
  UnitVector left = {};
  const std::array<Galactic, 3> axes = {{{0.0, 0.0}, {90.0, 0.0}, {0.0, 90.0}}};
  for (std::size_t i = 0; i < 3; ++i) {
    const double of_the_sun = sun.speed * dot(unit_vector(sun.l, sun.b), unit_vector(axes[i].l, axes[i].b));
    left[i] = of_the_sun - local_group_correction(axes[i]);
    for (const Attractor& a : published_attractors()) left[i] -= our_infall(a, axes[i]);
  }
  CHECK(std::sqrt(dot(left, left)) == Approx(290.0).margin(5.0));
}
