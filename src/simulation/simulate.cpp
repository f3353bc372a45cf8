#include "simulation/simulate.h"

#include <fmt/format.h>

#include <Eigen/Cholesky>
#include <algorithm>
#include <optional>

#include "base/error.h"
#include "base/parallel.h"
#include "simulation/observe.h"
#include "simulation/simulated_passbands.h"

namespace thirdrung {

namespace {

/// Draws that one supernova may take before the survey is called blind.
constexpr std::uint64_t most_attempts = 20000;

/// What a stream of random numbers is for.
enum Purpose : std::uint64_t { truth_draws = 1, table_draws, photometry_draws, summary_draws };

/// Numbers of calibrators start here, out of the way of those of the surveys' own supernovae.
constexpr std::size_t first_calibrator = 1000000;

/// One supernova to be found by one survey.
struct Slot {
  std::size_t survey = 0;
  std::size_t number = 0;                          ///< Within the survey that finds it.
  std::optional<std::size_t> host = std::nullopt;  ///< Of a calibrator.

  /// Which row of errors its table has: supernovae of one host share redshift and mass.
  std::size_t table_number() const { return host ? first_calibrator + *host : number; }
};

std::vector<Slot> slots_of(const SimulationOptions& options, const std::vector<SimulatedHost>& hosts = {}) {
  std::vector<Slot> out;
  for (std::size_t k = 0; k < options.surveys.size(); ++k) {
    for (std::size_t i = 0; i < options.surveys[k].supernovae; ++i) out.push_back({k, i});
  }
  if (hosts.empty()) return out;
  const auto host_of = hosts_of_calibrators(options.calibrators);
  for (std::size_t i = 0; i < host_of.size(); ++i)
    out.push_back({hosts[host_of[i]].survey, first_calibrator + i, host_of[i]});
  return out;
}

std::vector<VolumeRedshifts> redshifts_of(const SimulationOptions& options) {
  std::vector<VolumeRedshifts> out;
  for (const SimulatedSurvey& survey : options.surveys) {
    out.emplace_back(survey.z_min, survey.z_max, options.relation.expansion);
  }
  return out;
}

std::string name_of(const SimulationOptions& options, const Slot& slot) {
  const SimulatedSurvey& survey = options.surveys[slot.survey];
  if (slot.host) return fmt::format("{}-{:03}", options.calibrators.prefix, slot.number - first_calibrator + 1);
  return fmt::format("{}-{:03}", survey.prefix.empty() ? survey.name : survey.prefix, slot.number + 1);
}

[[noreturn]] void nothing_found(const SimulationOptions& options, const SimulatedSurvey& survey) {
  throw InputError({options.origin, {}, "survey"},
                   fmt::format("survey \"{}\" finds none of {} supernovae", survey.name, most_attempts),
                   "make it deeper, or ease peak_limit, detections, first_phase or lost");
}

/// Calls try_one(truth, stream, attempt) with new supernovae until it says that one is found.
/// @param hosts of the calibrators; may be empty where there are none among the slots.
template <typename TryOne>
void draw_until_found(const SimulationOptions& options, const Slot& slot, const VolumeRedshifts& redshifts,
                      const std::vector<SimulatedHost>& hosts, const TryOne& try_one) {
  const SimulatedSurvey& survey = options.surveys[slot.survey];
  for (std::uint64_t attempt = 0; attempt < most_attempts; ++attempt) {
    RandomStream stream(options.seed, {truth_draws, slot.survey, slot.number, attempt});
    SupernovaTruth truth = draw_supernova(options, survey, redshifts, stream);
    if (slot.host) truth = in_host(options, hosts[*slot.host], truth);
    truth.name = name_of(options, slot);
    if (try_one(truth, stream, attempt)) return;
  }
  nothing_found(options, survey);
}

/// One row of the output: a supernova seen by a survey.
struct Row {
  std::size_t survey = 0;
  std::size_t slot = 0;
};

/// Survey by survey: its own supernovae, then those it shares.
std::vector<Row> rows_of(const SimulationOptions& options, const std::vector<Slot>& slots,
                         const std::vector<SupernovaTruth>& truths) {
  std::vector<Row> out;
  for (std::size_t k = 0; k < options.surveys.size(); ++k) {
    const SimulatedSurvey& survey = options.surveys[k];
    for (std::size_t i = 0; i < slots.size(); ++i) {
      if (slots[i].survey == k) out.push_back({k, i});
    }
    std::size_t shared = 0;
    for (std::size_t i = 0; i < slots.size() && shared < survey.shared; ++i) {
      const bool theirs = options.surveys[slots[i].survey].name == survey.shared_with;
      const bool in_reach = truths[i].z_flow > survey.z_min && truths[i].z_flow < survey.z_max;
      if (!theirs || !in_reach || slots[i].host) continue;
      out.push_back({k, i});
      ++shared;
    }
  }
  return out;
}

Supernova table_row(const SimulationOptions& options, std::size_t survey, const Slot& slot,
                    const SupernovaTruth& truth) {
  // The table's errors belong to the supernova, not to the survey: two surveys quote the same redshift and mass.
  RandomStream stream(options.seed, {table_draws, slot.survey, slot.table_number()});
  return tabulated(options, options.surveys[survey], truth, stream);
}

}  // namespace

SimulatedSample simulate(const SimulationOptions& options, const SpectralTemplate& model) {
  check_simulation(options);
  SimulatedSample out;
  out.hosts = draw_hosts(options);
  const std::vector<Slot> slots = slots_of(options, out.hosts);
  const std::vector<VolumeRedshifts> redshifts = redshifts_of(options);
  const Extinction dust(options.milky_way.law, options.milky_way.r_v);
  std::vector<std::vector<TruePassband>> passbands;
  for (const SimulatedSurvey& survey : options.surveys) passbands.push_back(true_passbands(options, survey));

  out.catalogue = simulated_catalogue(options);
  out.a_b = options.relation.a_b();
  out.truths.resize(slots.size());
  std::vector<LightCurve> own(slots.size());
  parallel_for(slots.size(), options.threads, [&](std::size_t i) {
    const SimulatedSurvey& survey = options.surveys[slots[i].survey];
    draw_until_found(options, slots[i], redshifts[slots[i].survey], out.hosts,
                     [&](const SupernovaTruth& truth, RandomStream& stream, std::uint64_t attempt) {
                       if (!is_found(survey, truth.m_b, stream)) return false;
                       RandomStream noise(options.seed, {photometry_draws, slots[i].survey, slots[i].survey,
                                                         slots[i].number, attempt});
                       own[i] = observe(options, survey, passbands[slots[i].survey], truth, model, dust, noise);
                       out.truths[i] = truth;
                       return !own[i].epochs.empty() && is_detected(survey, own[i]);
                     });
  });

  const std::vector<Row> rows = rows_of(options, slots, out.truths);
  std::vector<LightCurve> light_curves(rows.size());
  parallel_for(rows.size(), options.threads, [&](std::size_t r) {
    const Slot& slot = slots[rows[r].slot];
    const std::size_t survey = rows[r].survey;
    if (slot.survey == survey) {
      light_curves[r] = std::move(own[rows[r].slot]);
    } else {
      RandomStream noise(options.seed, {photometry_draws, survey, slot.survey, slot.number, most_attempts});
      light_curves[r] =
          observe(options, options.surveys[survey], passbands[survey], out.truths[rows[r].slot], model, dust, noise);
    }
  });
  for (std::size_t r = 0; r < rows.size(); ++r) {
    const Row& row = rows[r];
    // A shared supernova may fall outside this survey's seasons.
    if (light_curves[r].epochs.empty()) continue;
    if (slots[row.slot].host) out.calibrators.push_back({out.truths[row.slot].name, *slots[row.slot].host});
    out.supernovae.push_back(table_row(options, row.survey, slots[row.slot], out.truths[row.slot]));
    out.light_curves.push_back(std::move(light_curves[r]));
  }
  std::sort(out.calibrators.begin(), out.calibrators.end(),
            [](const SimulatedCalibrator& a, const SimulatedCalibrator& b) { return a.supernova < b.supernova; });
  return out;
}

std::vector<SimulatedSummary> simulate_summaries(const SimulationOptions& options, const SummaryErrors& errors) {
  check_simulation(options);
  const std::vector<Slot> slots = slots_of(options);
  const std::vector<VolumeRedshifts> redshifts = redshifts_of(options);
  Eigen::Matrix3d correlation;
  correlation << 1, errors.m_b_with_s, errors.m_b_with_c, errors.m_b_with_s, 1, errors.s_with_c, errors.m_b_with_c,
      errors.s_with_c, 1;
  const Eigen::Vector3d typical(errors.m_b, errors.s, errors.c);
  const Eigen::Matrix3d typical_covariance = typical.asDiagonal() * correlation * typical.asDiagonal();
  const Eigen::Matrix3d root = typical_covariance.llt().matrixL();

  std::vector<SimulatedSummary> out(slots.size());
  parallel_for(slots.size(), options.threads, [&](std::size_t i) {
    const SimulatedSurvey& survey = options.surveys[slots[i].survey];
    draw_until_found(options, slots[i], redshifts[slots[i].survey], {},
                     [&](const SupernovaTruth& truth, RandomStream& stream, std::uint64_t attempt) {
                       RandomStream noise(options.seed, {summary_draws, slots[i].survey, slots[i].number, attempt});
                       const double scale = 1 + errors.spread * noise.uniform(-1, 1);
                       const double n0 = noise.normal();
                       const double n1 = noise.normal();
                       const double n2 = noise.normal();
                       const Eigen::Vector3d error = scale * (root * Eigen::Vector3d(n0, n1, n2));
                       out[i].measured = Eigen::Vector3d(truth.m_b, truth.s, truth.c) + error;
                       out[i].covariance = scale * scale * typical_covariance;
                       out[i].truth = truth;
                       return is_found(survey, out[i].measured[0], stream);
                     });
    out[i].supernova = table_row(options, slots[i].survey, slots[i], out[i].truth);
  });
  return out;
}

}  // namespace thirdrung
