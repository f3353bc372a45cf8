#include <catch2/catch.hpp>

#include "tables/scratch_folder.h"
#include "training/small_training.h"
#include "training/training_report.h"

namespace thirdrung::testing {
namespace {

TrainingSetup quick_setup(int threads) {
  TrainingSetup setup;
  setup.bases = small_bases();
  setup.gauge_b = "blue";
  setup.gauge_v = "green";
  setup.trainer.threads = threads;
  setup.trainer.iterations = 3;
  setup.trainer.scatter_rounds = 1;
  setup.choose_smoothing = false;
  setup.cross_validation.folds = 2;
  return setup;
}

SimulatedTraining few(int supernovae) {
  SimulatedTrainingOptions how;
  how.supernovae = supernovae;
  how.cadence = 7;
  return simulated_training(how);
}

TrainingResult trained(const SimulatedTraining& simulated, const TrainingSetup& setup) {
  return run_training(simulated.candidates, {}, simulated.catalogue, std::nullopt, Extinction(), setup);
}

std::string joined(const std::vector<std::string>& sentences) {
  std::string out;
  for (const std::string& one : sentences) out += one + "\n";
  return out;
}

/// The prepared supernovae, cut down to what `keep` accepts.
template <typename Keep>
std::vector<TrainingSupernova> kept(const PreparedTraining& set, const Keep& keep) {
  std::vector<TrainingSupernova> out;
  for (TrainingSupernova sn : set.supernovae) {
    if (keep(sn)) out.push_back(std::move(sn));
  }
  return out;
}

}  // namespace

TEST_CASE("one thread and two give the same bits, and a report") {
  const SimulatedTraining simulated = few(24);
  const TrainingResult one = trained(simulated, quick_setup(1));
  const TrainingResult two = trained(simulated, quick_setup(2));
  CHECK(one.state.model.log_flux == two.state.model.log_flux);
  CHECK(one.state.model.stretch_response == two.state.model.stretch_response);
  CHECK(one.state.model.colour_law == two.state.model.colour_law);
  CHECK(one.state.model.log_epoch_scatter == two.state.model.log_epoch_scatter);
  CHECK(one.trained.covariance_modes == two.trained.covariance_modes);
  REQUIRE(one.out_of_fold.fits.size() == two.out_of_fold.fits.size());
  for (std::size_t i = 0; i < one.out_of_fold.fits.size(); ++i) {
    CHECK(one.out_of_fold.fits[i].chi2 == two.out_of_fold.fits[i].chi2);
  }

  std::vector<LightCurve> light_curves;
  for (const TrainingCandidate& candidate : simulated.candidates) light_curves.push_back(candidate.light_curve);
  const ScratchFolder folder;
  write_training_report(one, light_curves, folder.path() / "made");
  const std::string text = training_report_text(one, light_curves);
  CHECK(text.find("## Residuals of held-out supernovae") != std::string::npos);
  CHECK(text.find("heron violet") != std::string::npos);
  for (const char* figure :
       {"light-curves", "spectra", "colour-law", "scatter", "residuals", "residual-map", "zero-points"}) {
    INFO(figure);
    CHECK(text.find(std::string("](") + figure + ".svg)") != std::string::npos);
    CHECK(std::filesystem::file_size(folder.path() / "made" / (std::string(figure) + ".svg")) > 1000);
  }
  CHECK(text.find("nan") == std::string::npos);
  CHECK(training_report_text(two, light_curves) == text);
}

TEST_CASE("what training sets do not determine is said") {
  const PreparedTraining set = prepared(few(24));
  CHECK(joined(training_set_warnings(set.supernovae)).find("Only 24 supernovae") != std::string::npos);
  const auto one_survey = kept(set, [](const TrainingSupernova& sn) { return sn.survey == "heron"; });
  CHECK(joined(training_set_warnings(one_survey)).find("One survey only") != std::string::npos);
  const auto two_surveys = joined(training_set_warnings(set.supernovae));
  CHECK(two_surveys.find("One survey only") == std::string::npos);
  CHECK(two_surveys.find("No band bluer") == std::string::npos);
  CHECK(two_surveys.find("No band redder") == std::string::npos);
  const auto without = [&](bool blue) {
    return kept(set, [&](TrainingSupernova& sn) {
      std::erase_if(sn.bands, [&](const TrainingBand& band) {
        return blue ? band.weights.mean_wavelength < 5000 : band.weights.mean_wavelength > 5500;
      });
      return !sn.bands.empty();
    });
  };
  CHECK(joined(training_set_warnings(without(true))).find("No band bluer") != std::string::npos);
  CHECK(joined(training_set_warnings(without(false))).find("No band redder") != std::string::npos);
  const auto near = kept(set, [&](const TrainingSupernova& sn) { return std::abs(sn.z_helio - 0.1) < 0.02; });
  REQUIRE_FALSE(near.empty());
  CHECK(joined(training_set_warnings(near)).find("Redshifts span only") != std::string::npos);
}

TEST_CASE("too few supernovae, or none, are refused in one sentence") {
  SimulatedTraining simulated = few(12);
  simulated.candidates.resize(7);
  CHECK(message_of<NoResultError>([&] { trained(simulated, quick_setup(1)); }).find("Only 7 of 7 supernovae") !=
        std::string::npos);
  simulated.candidates.clear();
  CHECK(message_of<NoResultError>([&] { trained(simulated, quick_setup(1)); }).find("Only 0 of 0") !=
        std::string::npos);
}

TEST_CASE("a passband that nobody knows is named, one outside the grid is left out") {
  SimulatedTraining simulated = few(12);
  simulated.candidates[3].light_curve.passbands[0] = "blu";
  const std::string message = message_of<InputError>([&] { trained(simulated, quick_setup(1)); });
  CHECK(message.find("blu") != std::string::npos);
  TrainingSetup setup = quick_setup(1);
  setup.gauge_b = "bleu";
  CHECK(message_of<InputError>([&] { trained(few(12), setup); }).find("bleu") != std::string::npos);

  SimulatedTraining wide = few(4);
  wide.catalogue.add(invented_band("ultraviolet", 2000, 2600));
  wide.candidates[0].light_curve.passbands[0] = "ultraviolet";
  const TrainingSupernova sn =
      prepare_supernova(wide.candidates[0].light_curve, wide.candidates[0].supernova, wide.truths[0].t_0, wide.truth,
                        wide.catalogue, Extinction(), {-15, 45});
  for (const TrainingBand& band : sn.bands) CHECK(band.passband != "ultraviolet");
  CHECK(sn.bands.size() >= 3);
}

}  // namespace thirdrung::testing
