#include "simulation/write_simulation.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <system_error>

#include "base/atomic_file.h"
#include "base/constants.h"
#include "base/error.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

double rounded(double value, int decimals) {
  const double scale = std::pow(10.0, decimals);
  return std::round(value * scale) / scale;
}

/// Decimals that keep a thousandth of an error.
int decimals_for(double error) {
  return std::max(0, 3 - static_cast<int>(std::floor(std::log10(error))) - 1);
}

void make_folder(const fs::path& folder) {
  std::error_code failure;
  fs::create_directories(folder, failure);
  if (failure) throw OutputError(fmt::format("{} cannot be made: {}", folder.string(), failure.message()));
}

void write_passbands(const SimulatedSample& sample, const SimulationOptions& options, const fs::path& folder) {
  make_folder(folder);
  std::string catalogue = "# Passbands of a simulated survey.\n";
  for (const SimulatedPassband& passband : options.passbands) {
    const Passband& curve = sample.catalogue.at(passband.id).passband;
    Table table;
    std::vector<double> throughput;
    for (const double value : curve.throughput()) throughput.push_back(rounded(value, 5));
    table.add_reals("wavelength", curve.wavelength(), "Angstrom");
    table.add_reals("throughput", throughput);
    table.set_meta("response", "photon");
    write_table(table, folder / (passband.id + ".ecsv"));
    catalogue += fmt::format(
        "\n[[passband]]\nid = \"{0}\"\nfile = \"{0}.ecsv\"\nresponse = \"photon\"\nsystem = \"AB\"\n"
        "zero_point_error = {1}\nwavelength_error = {2}\nsource = \"simulated\"\n",
        passband.id, passband.zero_point_error, passband.wavelength_error);
  }
  write_file_atomically(folder / "catalogue.toml", catalogue);
}

Table photometry_table(const SimulatedSample& sample, const SimulatedSurvey& survey) {
  std::vector<std::string> names;
  std::vector<std::string> passbands;
  std::vector<double> mjd;
  std::vector<double> value;
  std::vector<double> error;
  for (const LightCurve& light_curve : sample.light_curves) {
    if (light_curve.survey != survey.name) continue;
    for (const Epoch& epoch : light_curve.epochs) {
      if (survey.magnitudes && epoch.flux < 3 * epoch.flux_error) continue;
      names.push_back(light_curve.supernova);
      passbands.push_back(light_curve.passbands[epoch.passband]);
      mjd.push_back(rounded(epoch.mjd, 4));
      if (survey.magnitudes) {
        value.push_back(rounded(sample.catalogue.at(passbands.back()).magnitude_of_flux(epoch.flux), 4));
        error.push_back(std::max(1e-4, rounded(epoch.flux_error / (epoch.flux * constants::ln_flux_per_mag), 4)));
      } else {
        const int decimals = decimals_for(epoch.flux_error);
        value.push_back(rounded(epoch.flux, decimals));
        error.push_back(rounded(epoch.flux_error, decimals));
      }
    }
  }
  const std::string unit = survey.magnitudes ? "mag" : "uJy";
  const std::string column = survey.magnitudes ? "mag" : "flux";
  Table table;
  table.add_strings("supernova", names);
  table.add_reals("mjd", mjd, "d");
  table.add_strings("passband", passbands);
  table.add_reals(column, value, unit);
  table.add_reals(column + "_error", error, unit);
  table.set_meta("source", "simulated");
  return table;
}

Table supernova_table(const SimulatedSample& sample, const SimulatedSurvey& survey) {
  std::vector<std::string> names;
  struct RealColumn {
    const char* name;
    const char* unit;
    double Supernova::*member;
    int decimals;
    std::vector<double> values = {};
  };
  RealColumn columns[] = {{"ra", "deg", &Supernova::ra, 5},
                          {"dec", "deg", &Supernova::dec, 5},
                          {"z_helio", "", &Supernova::z_helio, 6},
                          {"z_helio_error", "", &Supernova::z_helio_error, 6},
                          {"mw_ebv", "mag", &Supernova::mw_ebv, 4},
                          {"mw_ebv_error", "mag", &Supernova::mw_ebv_error, 4},
                          {"host_log_mass", "dex", &Supernova::host_log_mass, 3},
                          {"host_log_mass_error", "dex", &Supernova::host_log_mass_error, 3},
                          {"peak_mjd_guess", "d", &Supernova::peak_mjd_guess, 1},
                          {"v_pec", "km / s", &Supernova::v_pec, 1}};
  bool has_velocity = false;
  for (const Supernova& supernova : sample.supernovae) {
    if (supernova.survey != survey.name) continue;
    names.push_back(supernova.name);
    for (RealColumn& column : columns) column.values.push_back(rounded(supernova.*column.member, column.decimals));
    has_velocity = has_velocity || !std::isnan(supernova.v_pec);
  }
  Table table;
  table.add_strings("supernova", names);
  for (RealColumn& column : columns) {
    if (column.member == &Supernova::v_pec && !has_velocity) continue;
    table.add_reals(column.name, column.values, column.unit);
  }
  table.set_meta("source", "simulated");
  return table;
}

Table truth_table(const SimulatedSample& sample, const SimulationOptions& options) {
  std::vector<std::string> names;
  struct RealColumn {
    const char* name;
    const char* unit;
    double SupernovaTruth::*member;
    int decimals;
  };
  const RealColumn columns[] = {{"t_0", "d", &SupernovaTruth::t_0, 4},
                                {"m_b", "mag", &SupernovaTruth::m_b, 5},
                                {"s", "", &SupernovaTruth::s, 5},
                                {"c", "mag", &SupernovaTruth::c, 5},
                                {"z_flow", "", &SupernovaTruth::z_flow, 7},
                                {"z_cmb", "", &SupernovaTruth::z_cmb, 7},
                                {"z_helio", "", &SupernovaTruth::z_helio, 7},
                                {"v_pec", "km / s", &SupernovaTruth::v_pec, 2},
                                {"mw_ebv", "mag", &SupernovaTruth::mw_ebv, 5},
                                {"host_log_mass", "dex", &SupernovaTruth::host_log_mass, 3},
                                {"intrinsic", "mag", &SupernovaTruth::intrinsic, 5}};
  Table table;
  for (const SupernovaTruth& truth : sample.truths) names.push_back(truth.name);
  table.add_strings("supernova", names);
  for (const RealColumn& column : columns) {
    std::vector<double> values;
    for (const SupernovaTruth& truth : sample.truths) values.push_back(rounded(truth.*column.member, column.decimals));
    table.add_reals(column.name, values, column.unit);
  }
  const SimulatedRelation& relation = options.relation;
  const auto remark = [&](const char* key, double value) { table.set_meta(key, fmt::format("{:.6g}", value)); };
  table.set_meta("a_b", fmt::format("{:.6f}", sample.a_b));
  remark("h0", relation.h0);
  remark("absolute_magnitude", relation.absolute_magnitude);
  remark("alpha", relation.alpha);
  remark("beta", relation.beta);
  remark("gamma", relation.gamma);
  remark("sigma_int", relation.sigma_int);
  remark("sigma_v", options.velocities.sigma_v);
  table.set_meta("seed", fmt::format("{}", options.seed));
  return table;
}

/// As a ladder below would hand them on: docs/formats.md, "calibrators".
Table calibrators_table(const SimulatedSample& sample, const SimulationOptions& options) {
  const double error = std::hypot(options.calibrators.modulus_error, options.calibrators.common_error);
  std::vector<std::string> names, hosts;
  std::vector<double> moduli;
  for (const SimulatedCalibrator& one : sample.calibrators) {
    names.push_back(one.supernova);
    hosts.push_back(sample.hosts[one.host].name);
    moduli.push_back(rounded(sample.hosts[one.host].measured_modulus, 4));
  }
  Table table;
  table.add_strings("supernova", names).add_strings("host", hosts).add_reals("distance_modulus", moduli, "mag");
  table.add_reals("distance_modulus_error", std::vector<double>(names.size(), rounded(error, 5)), "mag");
  table.set_meta("source", "simulated");
  return table;
}

Table host_covariance_table(const SimulatedSample& sample, const SimulationOptions& options) {
  std::vector<std::size_t> hosts;  // Those that have a calibrator in the tables.
  for (std::size_t h = 0; h < sample.hosts.size(); ++h) {
    if (std::any_of(sample.calibrators.begin(), sample.calibrators.end(), [h](const auto& c) { return c.host == h; }))
      hosts.push_back(h);
  }
  const Eigen::MatrixXd covariance = host_covariance(options);
  std::vector<std::string> names;
  names.reserve(hosts.size());
  for (const std::size_t h : hosts) names.push_back(sample.hosts[h].name);
  Table table;
  table.add_strings("host", names);
  for (std::size_t k = 0; k < hosts.size(); ++k) {
    std::vector<double> column;
    column.reserve(hosts.size());
    for (const std::size_t h : hosts)
      column.push_back(rounded(covariance(static_cast<Eigen::Index>(h), static_cast<Eigen::Index>(hosts[k])), 9));
    table.add_reals(names[k], std::move(column), "mag2");
  }
  table.set_meta("source", "simulated");
  return table;
}

}  // namespace

void write_simulation(const SimulatedSample& sample, const SimulationOptions& options, const fs::path& folder) {
  write_passbands(sample, options, folder / "passbands");
  make_folder(folder / "lightcurves");
  make_folder(folder / "supernovae");
  for (const SimulatedSurvey& survey : options.surveys) {
    write_table(photometry_table(sample, survey), folder / "lightcurves" / (survey.name + ".ecsv"));
    write_table(supernova_table(sample, survey), folder / "supernovae" / (survey.name + ".ecsv"));
  }
  if (!sample.calibrators.empty()) {
    write_table(calibrators_table(sample, options), folder / "calibrators.ecsv");
    write_table(host_covariance_table(sample, options), folder / "host-covariance.ecsv");
  }
  write_table(truth_table(sample, options), folder / "truth.ecsv");
}

}  // namespace thirdrung
