#include <Eigen/Cholesky>
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

/// Fluxes of one passband as they would be if its zero point made every magnitude fainter by `shift`; errors as they
/// were, so that the noise model stays the same.
std::vector<TrainingSupernova> with_zero_point(std::vector<TrainingSupernova> supernovae, const std::string& passband,
                                               double shift) {
  const double factor = std::pow(10.0, -0.4 * shift);
  for (TrainingSupernova& sn : supernovae) {
    for (const TrainingBand& band : sn.bands) {
      if (band.passband != passband) continue;
      for (std::size_t e = band.begin; e < band.end; ++e) sn.epochs[e].flux *= factor;
    }
  }
  return supernovae;
}

// The response is the step that the normal equations take when the fluxes of a band are really moved, noise and robust
// weights held. Tolerance: the second order of 10^(-0.4 x) at 0.01 mag is 0.5%. (Full retraining, where noise and
// weights follow, differs by more: docs/template.md.)
TEST_CASE("stored response to a zero point is the step that moved data ask for", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const Setting setting = read_setting(data);
  const Extinction dust;
  TrainerOptions options;
  options.prior.c_mean = 0.05;
  const SpectralTemplate start = start_template(coarse_grids(), setting.catalogue, "landolt-B", "landolt-V");
  TrainingSelection selection = select_supernovae(setting.candidates, start, setting.catalogue, dust, {}, options);
  TrainingState state = selection.state;
  std::vector<EliminatedSupernova> eliminated;
  const NormalEquations system = assemble(state, selection.supernovae, options, eliminated);
  const auto responses =
      calibration_responses(state, selection.supernovae, setting.candidates, selection.candidate, setting.catalogue,
                            setting.star, dust, system, eliminated, options.threads);
  const Eigen::LLT<Eigen::MatrixXd> factor(system.hessian.selfadjointView<Eigen::Lower>());
  for (const std::string passband : {"ps1-g", "ps1-i", "csp-B"}) {
    const auto response =
        std::find_if(responses.begin(), responses.end(), [&](const auto& r) { return r.passband == passband; });
    REQUIRE(response != responses.end());
    const auto moved = with_zero_point(selection.supernovae, passband, 0.01);
    const NormalEquations moved_system = assemble(state, moved, options, eliminated);
    const Eigen::VectorXd step = factor.solve(moved_system.gradient - system.gradient) / 0.01;
    INFO(passband);
    CHECK((step - response->zero_point).cwiseAbs().maxCoeff() < 0.01 * response->zero_point.cwiseAbs().maxCoeff());
  }
}

}  // namespace
}  // namespace thirdrung
