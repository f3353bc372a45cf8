#include "pipeline/scan_tables.h"

#include "sky/position.h"

namespace thirdrung {

Table scans_table(const std::vector<ScanRow>& rows) {
  std::vector<std::string> scan, setting, caution;
  std::vector<std::int64_t> supernovae;
  std::vector<double> a_b, a_b_error, delta, delta_error;
  for (const ScanRow& row : rows) {
    scan.push_back(row.scan);
    setting.push_back(row.setting);
    supernovae.push_back(static_cast<std::int64_t>(row.supernovae));
    a_b.push_back(row.a_b);
    a_b_error.push_back(row.a_b_error);
    delta.push_back(row.delta_ab);
    delta_error.push_back(row.delta_ab_error);
    caution.push_back(row.caution);
  }
  Table out;
  out.add_strings("scan", std::move(scan)).add_strings("setting", std::move(setting));
  out.add_integers("supernovae", std::move(supernovae));
  out.add_reals("a_b", std::move(a_b)).add_reals("a_b_error", std::move(a_b_error));
  out.add_reals("delta_ab", std::move(delta), "", "against the baseline");
  out.add_reals("delta_ab_error", std::move(delta_error), "", "of that difference, in the joint covariance");
  out.add_strings("caution", std::move(caution));
  return out;
}

Table zrange_grid_table(const std::vector<ScanRow>& rows) {
  std::vector<double> z_min, z_max, delta, error;
  std::vector<std::int64_t> supernovae;
  std::vector<std::string> caution;
  for (const ScanRow& row : rows) {
    z_min.push_back(row.coordinates.at(0));
    z_max.push_back(row.coordinates.at(1));
    supernovae.push_back(static_cast<std::int64_t>(row.supernovae));
    delta.push_back(row.delta_ab);
    error.push_back(row.delta_ab_error);
    caution.push_back(row.caution);
  }
  Table out;
  out.add_reals("z_min", std::move(z_min)).add_reals("z_max", std::move(z_max));
  out.add_integers("supernovae", std::move(supernovae));
  out.add_reals("delta_ab", std::move(delta), "", "against the baseline");
  out.add_reals("delta_ab_error", std::move(error), "", "of that difference");
  out.add_strings("caution", std::move(caution));
  return out;
}

Table sky_halves_table(const std::vector<ScanRow>& rows) {
  std::vector<double> ra, dec, l, b, delta, error;
  std::vector<std::int64_t> supernovae;
  std::vector<std::string> caution;
  for (const ScanRow& row : rows) {
    const Galactic galactic = galactic_from_icrs(row.coordinates.at(0), row.coordinates.at(1));
    ra.push_back(row.coordinates.at(0));
    dec.push_back(row.coordinates.at(1));
    l.push_back(galactic.l);
    b.push_back(galactic.b);
    supernovae.push_back(static_cast<std::int64_t>(row.supernovae));
    delta.push_back(row.delta_ab);
    error.push_back(row.delta_ab_error);
    caution.push_back(row.caution);
  }
  Table out;
  out.add_reals("ra", std::move(ra), "deg", "pole of the half").add_reals("dec", std::move(dec), "deg");
  out.add_reals("gal_l", std::move(l), "deg").add_reals("gal_b", std::move(b), "deg");
  out.add_integers("supernovae", std::move(supernovae), "", "in both halves");
  out.add_reals("delta_ab", std::move(delta), "", "of the half about the pole minus the other");
  out.add_reals("delta_ab_error", std::move(error), "", "of that difference");
  out.add_strings("caution", std::move(caution));
  return out;
}

}  // namespace thirdrung
