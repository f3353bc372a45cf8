#include "pipeline/inputs.h"

#include <fmt/format.h>

#include <map>

#include "sample/read_supernovae.h"
#include "sky/position.h"
#include "tables/read_write.h"
#include "template/template_file.h"

namespace thirdrung {

namespace {

/// Objects of one name farther apart than this are not one supernova [deg].
constexpr double largest_separation = 60.0 / 3600.0;

std::optional<DustMap> read_map(const MilkyWayInput& dust) {
  if (dust.map_healpix.given()) {
    require_exists(dust.map_healpix);
    return DustMap::healpix(dust.map_healpix.path, dust.map);
  }
  if (!dust.map_north.given()) return std::nullopt;
  require_exists(dust.map_north);
  require_exists(dust.map_south);
  return DustMap::lambert(dust.map_north.path, dust.map_south.path, dust.map);
}

void refuse_shared_names(const std::vector<Supernova>& supernovae) {
  std::map<std::string, const Supernova*> first;
  for (const Supernova& one : supernovae) {
    const auto [found, fresh] = first.emplace(one.name, &one);
    if (fresh) continue;
    const Supernova& other = *found->second;
    const double apart = separation(one.ra, one.dec, other.ra, other.dec);
    if (apart <= largest_separation) continue;
    Place place = one.place;
    place.column = "supernova";
    throw InputError(place,
                     fmt::format("{} of {} and {} of {} are {:.3g} deg apart, so they are not one supernova", one.name,
                                 one.survey, other.name, other.survey, apart),
                     "rename one of them, or mend its position");
  }
}

/// Two rows of one name contradict each other, or will one day: the table as a whole is refused.
void refuse_repeated_names(const Table& table) {
  std::map<std::string, std::size_t> first;
  const auto names = table.strings("supernova");
  for (std::size_t i = 0; i < names.size(); ++i) {
    const auto [found, fresh] = first.emplace(names[i], i);
    if (fresh || names[i].empty()) continue;
    throw InputError(table.place(i, "supernova"),
                     fmt::format("{} is listed twice, first in row {}", names[i], found->second + 1),
                     "keep one of the rows");
  }
}

void append(std::vector<SetAside>& to, std::vector<SetAside>&& from) {
  for (SetAside& one : from) to.push_back(std::move(one));
}

}  // namespace

PassbandCatalogue read_catalogue(const RunFile& run) {
  require_exists(run.passband_catalogue);
  std::optional<Spectrum> star;
  if (run.standard_star.given()) {
    require_exists(run.standard_star);
    star = read_spectrum(read_table(run.standard_star.path));
  }
  return PassbandCatalogue::read(run.passband_catalogue.path, star);
}

TrainedTemplate read_run_template(const RunFile& run) {
  require_exists(run.template_file);
  return read_template(run.template_file.path);
}

SurveySupernovae read_all_supernovae(const RunFile& run) {
  SurveySupernovae all;
  for (const SurveyInput& survey : run.surveys) {
    require_exists(survey.supernovae);
    const Table table = read_table(survey.supernovae.path);
    refuse_repeated_names(table);
    SupernovaList list = read_supernovae(table, survey.name);
    for (Supernova& one : list.supernovae) all.supernovae.push_back(std::move(one));
    append(all.set_aside, std::move(list.set_aside));
  }
  refuse_shared_names(all.supernovae);
  const auto map = read_map(run.milky_way);
  SkyReddeningResult reddening = apply_sky_reddening(all.supernovae, run.milky_way.source, map ? &*map : nullptr);
  append(all.set_aside, std::move(reddening.set_aside));
  for (Supernova& one : all.supernovae) {
    one.mw_ebv *= run.milky_way.scale;
    one.mw_ebv_error *= run.milky_way.scale;
  }
  return all;
}

Photometry read_all_photometry(const RunFile& run, const PassbandCatalogue& catalogue) {
  Photometry all;
  for (const SurveyInput& survey : run.surveys) {
    require_exists(survey.photometry);
    Photometry one = read_photometry(survey.photometry.path, catalogue, survey.name);
    survey.error_scale.apply(one, catalogue);
    for (LightCurve& light_curve : one.light_curves) all.light_curves.push_back(std::move(light_curve));
    append(all.set_aside, std::move(one.set_aside));
  }
  return all;
}

RedshiftOptions read_redshift_options(const RunFile& run) {
  RedshiftOptions options = run.redshift.options;
  if (options.velocity == VelocitySource::grid) {
    require_exists(run.redshift.velocity_field);
    options.grid =
        std::make_shared<VelocityGrid>(VelocityGrid::read(run.redshift.velocity_field.path, run.redshift.grid));
  }
  return options;
}

}  // namespace thirdrung
