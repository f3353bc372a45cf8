#include "simulation/draw_supernova.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/constants.h"
#include "base/error.h"

namespace thirdrung {

namespace {

constexpr int most_attempts = 100000;

[[noreturn]] void impossible(const SimulationOptions& options, const std::string& what) {
  throw InputError({options.origin, {}, {}}, fmt::format("{} is never drawn", what),
                   "widen the limits, or the population");
}

/// Two half-Gaussians of different width about one peak, cut to its limits.
double draw_stretch(const SimulationOptions& options, RandomStream& stream) {
  const SimulatedPopulation& p = options.population;
  const double both = p.s_width_below + p.s_width_above;
  for (int attempt = 0; attempt < most_attempts; ++attempt) {
    const bool below = stream.uniform() * both < p.s_width_below;
    const double away = std::abs(stream.normal());
    const double s = below ? p.s_peak - away * p.s_width_below : p.s_peak + away * p.s_width_above;
    if (s >= p.s_min && s <= p.s_max) return s;
  }
  impossible(options, "a stretch between s_min and s_max");
}

double draw_colour(const SimulationOptions& options, RandomStream& stream) {
  const SimulatedPopulation& p = options.population;
  for (int attempt = 0; attempt < most_attempts; ++attempt) {
    double c = p.c_mean + p.c_width * stream.normal();
    if (p.c_tail > 0) c += stream.exponential(p.c_tail);
    if (c <= p.c_max) return c;
  }
  impossible(options, "a colour below c_max");
}

/// Position and the reddening there.
void draw_place(const SimulationOptions& options, const SimulatedFootprint& footprint, SupernovaTruth& truth,
                RandomStream& stream) {
  const SimulatedMilkyWay& dust = options.milky_way;
  const double low = std::sin(footprint.dec_min * constants::degree);
  const double high = std::sin(footprint.dec_max * constants::degree);
  for (int attempt = 0; attempt < most_attempts; ++attempt) {
    truth.ra = std::fmod(stream.uniform(footprint.ra_min, footprint.ra_max) + 360.0, 360.0);
    truth.dec = std::asin(stream.uniform(low, high)) / constants::degree;
    const double latitude = std::abs(galactic_from_icrs(truth.ra, truth.dec).b);
    const double sine = std::max(std::sin(latitude * constants::degree), 0.02);
    truth.mw_ebv = dust.ebv_at_pole / sine * std::exp(dust.clumpiness * stream.normal());
    if (latitude >= footprint.galactic_latitude_min && truth.mw_ebv <= dust.ebv_max) return;
  }
  impossible(options, "a position within the footprint and ebv_max");
}

void draw_velocity(const SimulatedVelocities& velocities, SupernovaTruth& truth, RandomStream& stream) {
  const Galactic where = galactic_from_icrs(truth.ra, truth.dec);
  const Galactic& apex = velocities.bulk_direction;
  truth.bulk_v_pec = velocities.bulk_speed * dot(unit_vector(where.l, where.b), unit_vector(apex.l, apex.b));
  truth.v_pec = truth.bulk_v_pec + velocities.sigma_v * stream.normal();
  truth.z_cmb = (1 + truth.z_flow) * (1 + truth.v_pec / constants::speed_of_light_km_s) - 1;
  truth.z_helio = z_helio_from_cmb(truth.z_cmb, where, velocities.sun);
}

}  // namespace

double SimulatedRelation::a_b() const {
  return std::log10(h0) - 0.2 * absolute_magnitude - 5.0;
}

VolumeRedshifts::VolumeRedshifts(double z_min, double z_max, const Expansion& expansion) {
  constexpr int steps = 4000;
  double sum = 0;
  for (int i = 0; i <= steps; ++i) {
    const double z = z_min + (z_max - z_min) * i / steps;
    if (i > 0) {
      const double before = z_.back();
      const double shell =
          std::pow(comoving_distance(z, expansion), 3) - std::pow(comoving_distance(before, expansion), 3);
      sum += shell / (1 + 0.5 * (z + before));
    }
    z_.push_back(z);
    cumulative_.push_back(sum);
  }
  for (double& part : cumulative_) part /= sum;
}

double VolumeRedshifts::quantile(double part) const {
  const auto above = std::upper_bound(cumulative_.begin() + 1, cumulative_.end() - 1, part);
  const auto i = static_cast<std::size_t>(above - cumulative_.begin());
  const double fraction = (part - cumulative_[i - 1]) / (cumulative_[i] - cumulative_[i - 1]);
  return z_[i - 1] + fraction * (z_[i] - z_[i - 1]);
}

double relation_magnitude(const SimulatedRelation& relation, const SupernovaTruth& truth) {
  const double distance = constants::speed_of_light_km_s / relation.h0 *
                          luminosity_distance(truth.z_flow, truth.z_helio, relation.expansion);
  const double step = truth.host_log_mass > relation.mass_step ? 0.5 : -0.5;
  return relation.absolute_magnitude + 5 * std::log10(distance) + 25 - relation.alpha * (truth.s - 1) +
         relation.beta * truth.c - relation.gamma * step;
}

SupernovaTruth draw_supernova(const SimulationOptions& options, const SimulatedSurvey& survey,
                              const VolumeRedshifts& redshifts, RandomStream& stream) {
  SupernovaTruth truth;
  truth.z_flow = redshifts.quantile(stream.uniform());
  draw_place(options, survey.footprint, truth, stream);
  draw_velocity(options.velocities, truth, stream);
  truth.s = draw_stretch(options, stream);
  truth.c = draw_colour(options, stream);
  truth.host_log_mass = options.population.mass_mean + options.population.mass_width * stream.normal();
  truth.intrinsic = options.relation.sigma_int * stream.normal();
  truth.m_b = relation_magnitude(options.relation, truth) + truth.intrinsic;
  const int season = std::min(static_cast<int>(stream.uniform() * survey.seasons), survey.seasons - 1);
  truth.t_0 = survey.first_mjd + 365.25 * season + survey.season_length * stream.uniform();
  return truth;
}

bool is_found(const SimulatedSurvey& survey, double m_b, RandomStream& stream) {
  return m_b + survey.peak_limit_width * stream.normal() < survey.peak_limit;
}

Supernova tabulated(const SimulationOptions& options, const SimulatedSurvey& survey, const SupernovaTruth& truth,
                    RandomStream& stream) {
  Supernova row;
  row.name = truth.name;
  row.survey = survey.name;
  row.ra = truth.ra;
  row.dec = truth.dec;
  row.z_helio = truth.z_helio + survey.z_error * stream.normal();
  row.z_helio_error = survey.z_error;
  if (options.velocities.bulk_tabulated) row.v_pec = truth.bulk_v_pec;
  row.mw_ebv = std::max(0.0, truth.mw_ebv * (1 + options.milky_way.table_error * stream.normal()));
  row.mw_ebv_error = options.milky_way.table_error * truth.mw_ebv;
  const double mass = truth.host_log_mass + options.population.mass_error * stream.normal();
  if (stream.uniform() >= options.population.mass_missing) {
    row.host_log_mass = mass;
    row.host_log_mass_error = options.population.mass_error;
  }
  row.peak_mjd_guess = truth.t_0 + stream.normal();
  return row;
}

}  // namespace thirdrung
