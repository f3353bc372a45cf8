// Times of the light-curve fit on one thread: the whole fit of a supernova of 60 epochs, its parts, and the fast path
// against the direct integral. Usage: bench_lightcurve [repetitions]
#include <fmt/format.h>

#include <cstdlib>
#include <ctime>
#include <random>

#include "lightcurve/fit.h"
#include "lightcurve/synthetic_survey.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

/// Processor seconds that a call takes, over `repetitions` calls; other work of the machine does not count.
template <typename Call>
double seconds_each(int repetitions, Call call) {
  const std::clock_t start = std::clock();
  for (int i = 0; i < repetitions; ++i) call(i);
  return static_cast<double>(std::clock() - start) / CLOCKS_PER_SEC / repetitions;
}

double sink = 0;  // What keeps the calls from being optimised away.

}  // namespace

int main(int argc, char** argv) {
  const int repetitions = argc > 1 ? std::atoi(argv[1]) : 2000;
  const SpectralTemplate model = synthetic_template();
  const PreparedTemplate prepared(model);
  const PassbandCatalogue catalogue = invented_catalogue();
  const Extinction dust;
  const Truth truth{58000, 16.5, 0.95, 0.05, 0.03, 0.1};
  const std::vector<std::string> bands = {"blue", "green", "red", "dark"};
  std::mt19937_64 generator(1);
  std::vector<LightCurve> light_curves;
  light_curves.reserve(20);
  for (int i = 0; i < 20; ++i) {
    light_curves.push_back(observe(truth, model, catalogue, bands, -12, 44, 4, 0.02, &generator));
  }
  const Supernova supernova = supernova_of(truth);

  const auto epochs = light_curves[0].epochs.size();
  int iterations = 0;
  const double whole = seconds_each(repetitions, [&](int i) {
    const auto fit =
        fit_light_curve(light_curves[static_cast<std::size_t>(i % 20)], supernova, prepared, catalogue, dust);
    iterations += fit.iterations;
    sink += fit.chi2;
  });
  fmt::print("whole fit, {} epochs in {} bands: {:.3f} ms, {:.1f} rebuilds of the covariance\n", epochs, bands.size(),
             1e3 * whole, static_cast<double>(iterations) / repetitions);

  const Passband& passband = catalogue.at("blue").passband;
  const double weights_time =
      seconds_each(repetitions, [&](int) { sink += band_weights(passband, truth.z, dust, truth.ebv).weight[3]; });
  const BandWeights weights = band_weights(passband, truth.z, dust, truth.ebv);
  const double table_time =
      seconds_each(repetitions, [&](int) { sink += BandTable(prepared.grid(), weights).mean_wavelength(); });
  fmt::print("building one band: weights {:.1f} us, table {:.1f} us\n", 1e6 * weights_time, 1e6 * table_time);

  const BandTable table(prepared.grid(), weights);
  const BandWeights fine = band_weights(passband, truth.z, dust, truth.ebv, 10.0);
  const double fast =
      seconds_each(100 * repetitions, [&](int i) { sink += table.at(-10 + 0.001 * (i % 50000), 0.95, 0.1).d_s; });
  const double direct = seconds_each(
      repetitions, [&](int i) { sink += integrate_band(model, fine, -10 + 0.001 * (i % 50000), 0.95, 0.1).d_s; });
  fmt::print(
      "flux and derivatives of one epoch: table {:.1f} ns, direct integral (10 Angstrom) {:.1f} us, ratio {:.0f}\n",
      1e9 * fast, 1e6 * direct, direct / fast);
  return sink == 0.123 ? 1 : 0;
}
