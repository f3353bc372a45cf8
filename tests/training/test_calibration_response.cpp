#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <map>

#include "lightcurve/photometry.h"
#include "real_data.h"
#include "sample/read_supernovae.h"
#include "tables/read_write.h"
#include "training/selection.h"
#include "training/template_bases.h"
#include "training/uncertainty.h"

namespace thirdrung {
namespace {

struct Setting {
  std::optional<Spectrum> star;
  PassbandCatalogue catalogue;
  std::vector<TrainingCandidate> candidates;
};

/// Foundation and CSP, whose passbands overlap without being the same: enough to determine a coarse template quickly.
Setting read_setting(const std::filesystem::path& data) {
  Setting out;
  out.star = read_spectrum(read_table(data / "standards/vega.ecsv"));
  out.catalogue = PassbandCatalogue::read(data / "passbands/catalogue.toml", out.star);
  for (const std::string survey : {"foundation", "csp"}) {
    std::map<std::string, Supernova> supernovae;
    const Table table = read_table(data / "supernovae" / (survey + ".ecsv"));
    for (const Supernova& sn : read_supernovae(table, survey).supernovae) supernovae[sn.name] = sn;
    const Photometry photometry = read_photometry(data / "lightcurves" / (survey + ".ecsv"), out.catalogue, survey);
    for (const LightCurve& curve : photometry.light_curves) {
      if (supernovae.contains(curve.supernova)) out.candidates.push_back({curve, supernovae[curve.supernova]});
    }
  }
  return out;
}

TemplateBasesOptions coarse_grids() {
  TemplateBasesOptions grids;
  grids.phase_step = 4;
  grids.fine_step = 260;
  grids.coarse_step = 300;
  return grids;
}

/// Fluxes of one passband as they would be if its zero point made every magnitude fainter by `shift`.
void move_zero_point(std::vector<TrainingSupernova>& supernovae, const std::string& passband, double shift) {
  const double factor = std::pow(10.0, -0.4 * shift);
  for (TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) {
      if (band.passband != passband) continue;
      for (std::size_t e = band.begin; e < band.end; ++e) {
        sn.epochs[e].flux *= factor;
        sn.epochs[e].flux_error *= factor;
      }
    }
  }
}

// What the template would be had this zero point been different: train again with it moved. The stored response is the
// linear part of that. They may differ because noise model and robust weights follow the data, which a first-order
// response leaves out: 5% of the largest response is allowed.
TEST_CASE("stored response to a zero point agrees with training again", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const Setting setting = read_setting(data);
  const Extinction dust;
  TrainerOptions options;
  options.prior.c_mean = 0.05;
  options.tolerance = 1e-4;
  options.iterations = 25;
  const SpectralTemplate start = start_template(coarse_grids(), setting.catalogue, "landolt-B", "landolt-V");
  TrainingSelection selection = select_supernovae(setting.candidates, start, setting.catalogue, dust, {}, options);
  TrainingState state = selection.state;
  options.scatter_rounds = 1;
  train(state, selection.supernovae, options);
  options.scatter_rounds = 0;
  train(state, selection.supernovae, options);
  std::vector<EliminatedSupernova> eliminated;
  const NormalEquations system = assemble(state, selection.supernovae, options, eliminated);
  const auto responses =
      calibration_responses(state, selection.supernovae, setting.candidates, selection.candidate, setting.catalogue,
                            setting.star, dust, system, eliminated, options.threads);
  const CoefficientLayout layout(state.model);
  for (const std::string passband : {"ps1-g", "ps1-i"}) {
    const auto response =
        std::find_if(responses.begin(), responses.end(), [&](const auto& r) { return r.passband == passband; });
    REQUIRE(response != responses.end());
    TrainingState again = state;
    std::vector<TrainingSupernova> moved = selection.supernovae;
    move_zero_point(moved, passband, 0.01);
    train(again, moved, options);
    const Eigen::VectorXd honest = (layout.gather(again.model) - layout.gather(state.model)) / 0.01;
    const auto largest_off = [&](Eigen::Index begin, Eigen::Index count) {
      const auto stored = response->zero_point.segment(begin, count);
      return (honest.segment(begin, count) - stored).cwiseAbs().maxCoeff() / stored.cwiseAbs().maxCoeff();
    };
    INFO(passband);
    CHECK(largest_off(0, layout.gamma_start()) < 0.05);
    CHECK(largest_off(layout.gamma_start(), layout.colour_start() - layout.gamma_start()) < 0.05);
    CHECK(largest_off(layout.colour_start(), layout.colours) < 0.05);
  }
}

}  // namespace
}  // namespace thirdrung
