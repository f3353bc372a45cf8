// Fits the supernovae of one published sample, for checks against scipy.
//   fit_light_curves DATA TEMPLATE SAMPLE FOLDER [REPETITIONS]
// DATA has the folders lightcurves, supernovae, passbands and standards; TEMPLATE is a template file, or "invented" for
// the template of the tests, which is then written as FOLDER/template.fits. Writes FOLDER/lightcurve-fits.ecsv and
// lightcurve-points.ecsv; with repetitions prints the processor time of one fit in milliseconds for every supernova.
#include <fmt/core.h>

#include <cstdlib>
#include <ctime>
#include <filesystem>

#include "../lightcurve/synthetic_template.h"
#include "lightcurve/results.h"
#include "sample/read_supernovae.h"
#include "tables/read_write.h"
#include "template/template_file.h"

using namespace thirdrung;

namespace {

SpectralTemplate template_of(const std::string& name, const std::filesystem::path& folder) {
  if (name != "invented") return read_template(name).model;
  TrainedTemplate invented{testing::synthetic_template(), {}, {}};
  write_template(invented, folder / "template.fits");
  return invented.model;
}

void run(const std::filesystem::path& data, const std::string& template_name, const std::string& sample,
         const std::filesystem::path& folder, int repetitions) {
  const Spectrum vega = read_spectrum(read_table(data / "standards" / "vega.ecsv"));
  const PassbandCatalogue catalogue = PassbandCatalogue::read(data / "passbands" / "catalogue.toml", vega);
  const PreparedTemplate prepared(template_of(template_name, folder));
  const Photometry photometry = read_photometry(data / "lightcurves" / (sample + ".ecsv"), catalogue, sample);
  const auto supernovae = read_supernovae(read_table(data / "supernovae" / (sample + ".ecsv")), sample).supernovae;
  const Extinction dust(DustLaw::fitzpatrick99, 3.1);
  const auto result = fit_all(photometry.light_curves, supernovae, prepared, catalogue, dust, {}, 1);
  write_table(fits_table(result.fits), folder / "lightcurve-fits.ecsv");
  write_table(points_table(result.fits, photometry.light_curves), folder / "lightcurve-points.ecsv");
  for (const LightCurveFit& fit : result.fits) {
    if (repetitions == 0) break;
    const auto light_curve = std::find_if(photometry.light_curves.begin(), photometry.light_curves.end(),
                                          [&](const LightCurve& one) { return one.supernova == fit.supernova; });
    const auto supernova = std::find_if(supernovae.begin(), supernovae.end(),
                                        [&](const Supernova& one) { return one.name == fit.supernova; });
    const std::clock_t start = std::clock();
    for (int i = 0; i < repetitions; ++i) fit_light_curve(*light_curve, *supernova, prepared, catalogue, dust);
    fmt::print("{} {:.6f}\n", fit.supernova,
               1e3 * static_cast<double>(std::clock() - start) / CLOCKS_PER_SEC / repetitions);
  }
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 5) {
    fmt::print(stderr, "usage: fit_light_curves DATA TEMPLATE SAMPLE FOLDER [REPETITIONS]\n");
    return 2;
  }
  try {
    run(argv[1], argv[2], argv[3], argv[4], argc > 5 ? std::atoi(argv[5]) : 0);
  } catch (const std::exception& fault) {
    fmt::print(stderr, "{}\n", fault.what());
    return 3;
  }
  return 0;
}
