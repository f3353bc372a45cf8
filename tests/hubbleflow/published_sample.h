#pragma once

#include <cmath>
#include <filesystem>
#include <map>
#include <string>

#include "hubbleflow/flow_sample.h"
#include "real_data.h"
#include "tables/read_write.h"

namespace thirdrung::testing {

/// The published Hubble-flow rows with a diagonal covariance: published errors and sigma_v, one entry a row. Supernovae
/// seen by several surveys have a row each there; their names get the survey as an ending, so that every row enters as
/// published.
inline FlowSample published_sample(const std::filesystem::path& folder, double sigma_v) {
  const Table table = read_table(folder / "published" / "supernovae.ecsv");
  std::map<std::string, std::pair<double, double>> position;
  for (const auto& entry : std::filesystem::directory_iterator(folder / "supernovae")) {
    const Table survey = read_table(entry.path());
    const auto names = survey.strings("supernova");
    const auto ra = survey.reals("ra");
    const auto dec = survey.reals("dec");
    for (std::size_t i = 0; i < names.size(); ++i) position[names[i]] = {ra[i], dec[i]};
  }
  const auto name = table.strings("supernova");
  const auto survey = table.strings("sample");
  const auto in_flow = table.integers("in_hubble_flow");
  const auto z_helio = table.reals("z_helio");
  const auto z_flow = table.reals("z_flow");
  const auto m_b = table.reals("m_b_standardised");
  const auto error = table.reals("m_b_standardised_error");
  FlowSample sample;
  std::vector<double> variance;
  for (std::size_t i = 0; i < name.size(); ++i) {
    if (in_flow[i] == 0) continue;
    FlowSupernova s;
    s.name = name[i] + " " + survey[i];
    s.surveys = {survey[i]};
    const auto it = position.find(name[i]);
    if (it != position.end()) {
      s.ra = it->second.first;
      s.dec = it->second.second;
    }
    s.z_helio = z_helio[i];
    s.z_flow = z_flow[i];
    s.m_b_standardised = m_b[i];
    sample.supernovae.push_back(s);
    const double velocity = 5.0 / std::log(10.0) * sigma_v / (299792.458 * z_flow[i]);
    variance.push_back(error[i] * error[i] + velocity * velocity);
  }
  sample.covariance =
      Eigen::Map<Eigen::VectorXd>(variance.data(), static_cast<Eigen::Index>(variance.size())).asDiagonal();
  return sample;
}

}  // namespace thirdrung::testing
