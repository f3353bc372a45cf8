#include "pipeline/training_file.h"

#include <fmt/format.h>
#include <toml++/toml.h>

#include "base/atomic_file.h"
#include "base/text.h"
#include "light/passband_catalogue.h"
#include "lightcurve/photometry.h"
#include "lightcurve/results.h"
#include "pipeline/run_section.h"
#include "pipeline/version.h"
#include "sample/read_supernovae.h"
#include "tables/read_write.h"
#include "template/template_file.h"
#include "training/training_report.h"
#include "training/training_tables.h"

namespace thirdrung {

namespace {

void read_count(RunSection& section, const char* key, int& value) {
  value = static_cast<int>(section.integer(key, value, 1));
}

void read_grids(RunSection section, TemplateBasesOptions& grids) {
  section.read_number("phase_step", grids.phase_step);
  section.read_number("fine_first", grids.fine_first);
  section.read_number("fine_last", grids.fine_last);
  section.read_number("fine_step", grids.fine_step);
  section.read_number("coarse_step", grids.coarse_step);
  section.read_number("usable_blue", grids.usable_blue);
  section.read_number("usable_red", grids.usable_red);
  section.done();
}

void read_cuts(RunSection section, TrainingCuts& cuts) {
  read_count(section, "least_bands", cuts.least_bands);
  read_count(section, "least_epochs", cuts.least_epochs);
  read_count(section, "least_near_peak", cuts.least_near_peak);
  section.read_number("earliest", cuts.earliest);
  section.read_number("latest", cuts.latest);
  section.read_number("first_phase", cuts.first_phase);
  section.read_number("most_reddening", cuts.most_reddening);
  section.read_number("s_min", cuts.s_min);
  section.read_number("s_max", cuts.s_max);
  section.read_number("most_colour", cuts.most_colour);
  section.read_number("most_chi2_per_dof", cuts.most_chi2_per_dof);
  section.read_number("error_floor", cuts.error_floor);
  section.done();
}

void read_solver(RunSection section, TrainerOptions& trainer) {
  section.read_number("s_mean", trainer.prior.s_mean);
  section.read_number("s_width", trainer.prior.s_width);
  section.read_number("c_mean", trainer.prior.c_mean);
  section.read_number("c_width", trainer.prior.c_width);
  section.read_number("robust_degrees", trainer.robust_degrees);
  section.read_number("tolerance", trainer.tolerance);
  read_count(section, "iterations", trainer.iterations);
  read_count(section, "scatter_rounds", trainer.scatter_rounds);
  section.done();
}

void read_smoothing(RunSection section, TrainingSetup& setup) {
  setup.choose_smoothing = section.flag("cross_validate", true);
  read_count(section, "folds", setup.cross_validation.folds);
  read_count(section, "sweeps", setup.cross_validation.sweeps);
  section.read_number("factor", setup.cross_validation.factor);
  Smoothness& smoothness = setup.trainer.smoothness;
  section.read_number("phi_phase", smoothness.phi_phase);
  section.read_number("phi_wavelength", smoothness.phi_wavelength);
  section.read_number("gamma_phase", smoothness.gamma_phase);
  section.read_number("gamma_wavelength", smoothness.gamma_wavelength);
  section.read_number("gamma_size", smoothness.gamma_size);
  section.read_number("colour", smoothness.colour);
  section.done();
}

void read_spectra(RunSection section, TrainingFile& out) {
  out.spectra = section.path("file");
  SpectraOptions& o = out.spectra_options;
  o.phase_qualities = section.text("phase_qualities", o.phase_qualities);
  if (section.has("subtypes")) o.subtypes = section.texts("subtypes");
  section.read_number("least_match", o.least_match);
  section.read_number("most_phase_mismatch", o.most_phase_mismatch);
  section.read_number("warp_step", o.warp_step);
  section.read_number("correlation_length", o.correlation_length);
  section.read_number("phase_error", o.phase_error);
  out.setup.trainer.spectra_correlation_length = o.correlation_length;
  section.done();
}

void read_surveys(const toml::table& root, const std::string& file, TrainingFile& out) {
  const toml::array* list = root["survey"].as_array();
  if (list == nullptr || list->empty()) {
    throw InputError({file, {}, "survey"}, "names no survey to train on",
                     "add a [[survey]] with name, photometry and supernovae");
  }
  for (const toml::node& node : *list) {
    if (!node.is_table()) throw InputError({file, {}, "survey"}, "is not a list of sections", "write [[survey]]");
    RunSection section(*node.as_table(), file, "[[survey]]");
    TrainingFile::Survey survey{section.text("name"), section.path("photometry"), section.path("supernovae"),
                                section.flag("check", false), read_error_scale(section)};
    section.done();
    out.surveys.push_back(std::move(survey));
  }
}

std::vector<TrainingCandidate> read_candidates(const TrainingFile& file, bool check, const PassbandCatalogue& catalogue,
                                               std::vector<SetAside>& set_aside) {
  std::vector<TrainingCandidate> out;
  for (const TrainingFile::Survey& survey : file.surveys) {
    if (survey.check != check) continue;
    SupernovaList list = read_supernovae(read_table(survey.supernovae.path), survey.name);
    Photometry photometry = read_photometry(survey.photometry.path, catalogue, survey.name);
    survey.error_scale.apply(photometry, catalogue);
    set_aside.insert(set_aside.end(), list.set_aside.begin(), list.set_aside.end());
    set_aside.insert(set_aside.end(), photometry.set_aside.begin(), photometry.set_aside.end());
    for (LightCurve& light_curve : photometry.light_curves) {
      const auto match = std::find_if(list.supernovae.begin(), list.supernovae.end(),
                                      [&](const Supernova& sn) { return sn.name == light_curve.supernova; });
      if (match == list.supernovae.end()) {
        set_aside.push_back({light_curve.supernova, survey.name, "not in the table of supernovae"});
      } else {
        out.push_back({std::move(light_curve), *match});
      }
    }
  }
  if (out.empty() && !check)
    throw NoResultError("No supernova has both photometry and a row in a table of supernovae.");
  return out;
}

void make_folders(const TrainingOutput& output) {
  std::vector<std::filesystem::path> folders = {output.folder};
  if (output.template_file.has_parent_path()) folders.push_back(output.template_file.parent_path());
  for (const std::filesystem::path& folder : folders) {
    std::error_code error;
    std::filesystem::create_directories(folder, error);
    if (error) throw OutputError(fmt::format("{}: cannot be made a folder: {}.", folder.string(), error.message()));
    write_file_atomically(folder / ".can-be-written", "");
    std::filesystem::remove(folder / ".can-be-written", error);
  }
}

std::vector<std::pair<std::string, std::string>> provenance_of(const TrainingFile& file, const TrainingResult& result) {
  std::vector<std::pair<std::string, std::string>> out = {{"program", program_version()},
                                                          {"training_file_sha256", sha256_of_text(file.content)}};
  const auto add = [&](const std::string& what, const InputFile& input) {
    if (input.given() && !std::filesystem::is_directory(input.path)) {
      out.emplace_back(what, input.path.filename().string() + " sha256 " + sha256_of_file(input.path));
    }
  };
  add("passbands", file.catalogue);
  add("standard_star", file.standard_star);
  add("spectra", file.spectra);
  for (const TrainingFile::Survey& survey : file.surveys) {
    add("photometry_" + survey.name, survey.photometry);
    add("supernovae_" + survey.name, survey.supernovae);
  }
  out.emplace_back("supernovae_used", fmt::format("{}", result.selection.supernovae.size()));
  std::size_t epochs = 0;
  for (const TrainingSupernova& sn : result.selection.supernovae) epochs += sn.epochs.size();
  out.emplace_back("epochs_used", fmt::format("{}", epochs));
  out.emplace_back("spectra_used", fmt::format("{}", result.state.spectra.size()));
  out.emplace_back("dust_law", fmt::format("{} R_V {}", name_of(file.dust_law), file.r_v));
  const Smoothness& s = result.smoothness;
  out.emplace_back("smoothing",
                   fmt::format("phi {:.4g} {:.4g}, gamma {:.4g} {:.4g} {:.4g}, colour {:.4g}", s.phi_phase,
                               s.phi_wavelength, s.gamma_phase, s.gamma_wavelength, s.gamma_size, s.colour));
  return out;
}

}  // namespace

TrainingFile read_training_file(const std::filesystem::path& path) {
  TrainingFile out;
  out.path = path;
  out.content = read_text_file(path);
  const toml::table root = parse_toml(out.content, path.string());
  const std::string file = path.string();
  RunSection top(root, file, "the training file");
  top.know(std::vector<std::string>{"survey", "passbands", "milky_way", "grids", "cuts", "spectra", "smoothing",
                                    "solver", "gauge"});
  out.setup.name = top.text("name");
  out.setup.covariance_modes = static_cast<int>(top.integer("covariance_modes", out.setup.covariance_modes, 1));
  out.setup.out_of_fold = top.flag("out_of_fold", true);
  const auto section = [&](const char* key) {
    const toml::table* table = root[key].as_table();
    return table ? RunSection(*table, file, fmt::format("[{}]", key)) : RunSection(file, fmt::format("[{}]", key));
  };
  read_surveys(root, file, out);
  RunSection passbands = section("passbands");
  out.catalogue = passbands.path("catalogue");
  out.standard_star = passbands.optional_path("standard_star");
  passbands.done();
  RunSection milky_way = section("milky_way");
  out.dust_law = dust_law_from_name(milky_way.text("law", "fitzpatrick99"), milky_way.place("law"));
  out.r_v = milky_way.number_between("r_v", 3.1, 2, 6);
  milky_way.done();
  RunSection gauge = section("gauge");
  out.setup.gauge_b = gauge.text("b");
  out.setup.gauge_v = gauge.text("v");
  gauge.done();
  read_grids(section("grids"), out.setup.bases);
  read_cuts(section("cuts"), out.setup.cuts);
  read_solver(section("solver"), out.setup.trainer);
  read_smoothing(section("smoothing"), out.setup);
  if (root.contains("spectra")) read_spectra(section("spectra"), out);
  top.done();
  return out;
}

TrainingResult train_from_file(const TrainingFile& file, const TrainingOutput& output, int threads) {
  for (const TrainingFile::Survey& survey : file.surveys) {
    require_exists(survey.photometry);
    require_exists(survey.supernovae);
  }
  // Before the long part: a place that cannot be written is found out now.
  make_folders(output);
  std::optional<Spectrum> star;
  if (file.standard_star.given()) star = read_spectrum(read_table(file.standard_star.path));
  const PassbandCatalogue catalogue = PassbandCatalogue::read(file.catalogue.path, star);
  std::vector<SetAside> set_aside;
  const std::vector<TrainingCandidate> candidates = read_candidates(file, false, catalogue, set_aside);
  std::vector<std::string> spectra_left_out;
  std::vector<TrainingSpectrum> spectra;
  if (file.spectra.given()) spectra = read_training_spectra(file.spectra.path, file.spectra_options, spectra_left_out);
  TrainingSetup setup = file.setup;
  setup.trainer.threads = threads;
  TrainingResult result =
      run_training(candidates, std::move(spectra), catalogue, star, Extinction(file.dust_law, file.r_v), setup);
  std::vector<SetAside> check_set_aside;
  result.check = check_on_other_surveys(read_candidates(file, true, catalogue, check_set_aside), result.trained.model,
                                        catalogue, Extinction(file.dust_law, file.r_v), setup);
  result.spectra_left_out = std::move(spectra_left_out);
  result.selection.left_out.insert(result.selection.left_out.begin(), set_aside.begin(), set_aside.end());
  result.trained.model.provenance = provenance_of(file, result);
  write_template(result.trained, output.template_file);
  write_table(training_set_table(result), output.folder / "training-set.ecsv");
  write_table(left_out_table(result), output.folder / "left-out.ecsv");
  write_table(cross_validation_table(result), output.folder / "cross-validation.ecsv");
  write_table(offsets_table(result.offsets), output.folder / "zero-point-offsets.ecsv");
  write_table(error_factors_table(result.error_factors), output.folder / "error-factors.ecsv");
  if (!result.check.offsets.empty()) {
    write_table(error_factors_table(result.check.error_factors), output.folder / "check-error-factors.ecsv");
    write_table(offsets_table(result.check.offsets), output.folder / "check-zero-point-offsets.ecsv");
    write_table(fits_table(result.check.as_given.fits), output.folder / "check-fits.ecsv");
    write_table(fits_table(result.check.with_offsets.fits), output.folder / "check-fits-with-offsets.ecsv");
  }
  std::vector<LightCurve> light_curves;
  light_curves.reserve(candidates.size());
  for (const TrainingCandidate& candidate : candidates) light_curves.push_back(candidate.light_curve);
  write_training_report(result, light_curves, output.folder);
  if (!result.out_of_fold.fits.empty()) {
    write_table(fits_table(result.out_of_fold.fits), output.folder / "out-of-fold-fits.ecsv");
    write_table(points_table(result.out_of_fold.fits, light_curves), output.folder / "out-of-fold-points.ecsv");
  }
  return result;
}

}  // namespace thirdrung
