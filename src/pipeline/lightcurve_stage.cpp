#include "pipeline/lightcurve_stage.h"

#include <fmt/format.h>

#include <array>
#include <map>
#include <set>

#include "base/error.h"
#include "base/progress.h"
#include "lightcurve/fit.h"
#include "lightcurve/results.h"
#include "pipeline/inputs.h"
#include "pipeline/table_tools.h"
#include "tables/fits_image.h"
#include "training/error_factors.h"
#include "training/training_tables.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

constexpr std::array<const char*, 4> parts = {"fits", "points", "curves", "set_aside"};
using ChunkTables = std::array<Table, parts.size()>;

fs::path chunk_file(const fs::path& folder, std::size_t number) {
  return folder / fmt::format("lightcurves-{:05}.fits", number);
}

/// The tables of a finished chunk, or nothing if there is none of this key. (A table without rows is not stored.)
std::optional<ChunkTables> read_chunk(const fs::path& file, const std::string& key) {
  std::error_code ignored;
  if (!fs::exists(file, ignored)) return std::nullopt;
  try {
    const FitsReader reader(file);
    if (reader.keyword("key") != key) return std::nullopt;
    ChunkTables tables;
    for (std::size_t k = 0; k < parts.size(); ++k) {
      if (reader.has(parts[k])) tables[k] = reader.table(parts[k]);
    }
    return tables;
  } catch (const InputError&) {
    return std::nullopt;  // Damaged: fitted again.
  }
}

void write_chunk(const fs::path& file, const std::string& key, const ChunkTables& tables) {
  FitsWriter writer;
  writer.add_keyword({"key", key, "of the inputs and settings"});
  for (std::size_t k = 0; k < parts.size(); ++k) {
    if (tables[k].rows() > 0) writer.add_table(tables[k], parts[k]);
  }
  writer.write(file);
}

/// Everything that the fits need, read once.
struct Bench {
  PassbandCatalogue catalogue;
  PreparedTemplate prepared;
  SurveySupernovae supernovae;
  Photometry photometry;
  Extinction dust;
  FitOptions options;
};

ChunkTables fit_chunk(const Bench& bench, std::size_t first, std::size_t count, int threads, Progress& progress) {
  const std::span light_curves = std::span(bench.photometry.light_curves).subspan(first, count);
  const LightCurveFits fits = fit_all(light_curves, bench.supernovae.supernovae, bench.prepared, bench.catalogue,
                                      bench.dust, bench.options, threads, &progress);
  ChunkTables tables;
  tables[0] = fits_table(fits.fits);
  if (bench.options.curves) {
    tables[1] = points_table(fits.fits, light_curves);
    tables[2] = curves_table(fits.fits, light_curves);
  }
  tables[3] = set_aside_table(fits.set_aside);
  return tables;
}

/// A row set aside in its supernova table makes its light curve be set aside too: one reason is enough.
std::vector<SetAside> before_the_fits(const SurveySupernovae& supernovae, const Photometry& photometry) {
  std::vector<SetAside> out = supernovae.set_aside;
  out.insert(out.end(), photometry.set_aside.begin(), photometry.set_aside.end());
  std::set<std::pair<std::string, std::string>> has_photometry;
  for (const LightCurve& one : photometry.light_curves) has_photometry.insert({one.survey, one.supernova});
  for (const SetAside& one : photometry.set_aside) has_photometry.insert({one.survey, one.supernova});
  for (const Supernova& one : supernovae.supernovae) {
    if (!has_photometry.contains({one.survey, one.name}))
      out.push_back({one.name, one.survey, "no photometry in the table of its survey"});
  }
  return out;
}

Table all_set_aside(const Bench& bench, const Table& from_fits) {
  const Table before = set_aside_table(before_the_fits(bench.supernovae, bench.photometry));
  const std::array<Table, 2> both = {before, from_fits};
  Table table = from_fits.rows() > 0 ? stacked(both) : before;
  const auto supernova = table.strings("supernova"), survey = table.strings("survey");
  std::set<std::pair<std::string, std::string>> seen;
  std::vector<bool> keep;
  for (std::size_t i = 0; i < table.rows(); ++i) keep.push_back(seen.insert({survey[i], supernova[i]}).second);
  return rows_of(table, keep);
}

Table error_factors_of(const Bench& bench, SpectralTemplate model, const Table& fits, int threads) {
  std::vector<LightCurveFit> rows;
  for (FittedSupernova& one : read_fits(fits)) rows.push_back(std::move(one.fit));
  if (!bench.options.template_scatter) {
    model.log_epoch_scatter.resize(0, 0);
    model.log_colour_scatter.resize(0);
  }
  const FittedSet set =
      fitted_set(bench.photometry.light_curves, bench.supernovae.supernovae, rows, model, bench.catalogue, bench.dust,
                 {bench.options.phase_min, bench.options.phase_max}, threads);
  return error_factors_table(error_factors_of_fits(model, set, threads));
}

}  // namespace

LightCurveTables fit_light_curves(const RunFile& run, const fs::path& chunks, const std::string& key) {
  PassbandCatalogue catalogue = read_catalogue(run);
  SurveySupernovae supernovae = read_all_supernovae(run);
  Photometry photometry = read_all_photometry(run, catalogue);
  const TrainedTemplate trained = read_run_template(run);
  Bench bench{std::move(catalogue),
              PreparedTemplate(trained.model),
              std::move(supernovae),
              std::move(photometry),
              Extinction(run.milky_way.law, run.milky_way.r_v),
              run.lightcurve};
  bench.options.curves = run.report.light_curves;
  const std::size_t total = bench.photometry.light_curves.size();
  std::array<std::vector<Table>, parts.size()> collected;
  Progress progress("Light curves", total);
  for (std::size_t first = 0, number = 0; first < total; first += lightcurves_a_chunk, ++number) {
    const std::size_t count = std::min(lightcurves_a_chunk, total - first);
    const fs::path file = chunk_file(chunks, number);
    auto tables = read_chunk(file, key);
    if (tables) {
      progress.advance(count);
    } else {
      write_chunk(file, key, fit_chunk(bench, first, count, run.threads, progress));
      tables = read_chunk(file, key);
      if (!tables) throw OutputError(fmt::format("{}: what was saved there cannot be read back.", file.string()));
    }
    for (std::size_t k = 0; k < parts.size(); ++k) collected[k].push_back(std::move((*tables)[k]));
  }
  LightCurveTables out{stacked(collected[0]), stacked(collected[1]), stacked(collected[2]), {}, {}};
  out.set_aside = all_set_aside(bench, stacked(collected[3]));
  if (out.fits.rows() == 0) {
    throw NoResultError(fmt::format("Not one of {} light curves could be fitted{}.", total,
                                    out.set_aside.rows() == 0
                                        ? std::string()
                                        : fmt::format("; the first: {}: {}", out.set_aside.strings("supernova").front(),
                                                      out.set_aside.strings("reason").front())));
  }
  out.error_factors = error_factors_of(bench, trained.model, out.fits, run.threads);
  return out;
}

void remove_chunks(const fs::path& chunks) {
  std::error_code ignored;
  for (const auto& entry : fs::directory_iterator(chunks, ignored)) {
    if (entry.path().filename().string().starts_with("lightcurves-")) fs::remove(entry.path(), ignored);
  }
}

}  // namespace thirdrung
