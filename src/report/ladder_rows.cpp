#include "report/ladder_rows.h"

namespace thirdrung {

bool has_ladder(const RunTables& run) {
  return run.calibrators && run.join && run.join->has("quantity");
}

LadderRows ladder_rows(const RunTables& run) {
  LadderRows out;
  const auto quantity = run.join->strings("quantity");
  const auto value = run.join->reals("value"), error = reals_or_missing(*run.join, "error");
  const std::pair<const char*, const char*> labels[] = {{"share_of_calibrators", "calibrators"},
                                                        {"share_of_hubble_flow", "the Hubble flow"},
                                                        {"share_of_coefficients", "α, β and γ"},
                                                        {"share_of_systematics", "systematics"}};
  for (std::size_t i = 0; i < quantity.size(); ++i) {
    if (quantity[i] == "m_b") out.m_b = {value[i], error[i]};
    for (const auto& [name, label] : labels) {
      if (quantity[i] == name) out.shares.emplace_back(label, value[i]);
    }
  }
  const Table& table = *run.calibrators;
  const auto supernova = table.strings("supernova"), host = strings_or_empty(table, "host"),
             why_not = strings_or_empty(table, "why_not");
  const auto modulus = reals_or_missing(table, "distance_modulus"),
             modulus_error = reals_or_missing(table, "distance_modulus_error"),
             absolute = reals_or_missing(table, "absolute_magnitude"),
             absolute_error = reals_or_missing(table, "absolute_magnitude_error"),
             residual = reals_or_missing(table, "residual");
  const auto used = flags_or(table, "used", true);
  for (std::size_t i = 0; i < supernova.size(); ++i)
    out.calibrators.push_back({supernova[i], host[i], why_not[i], modulus[i], modulus_error[i], absolute[i],
                               absolute_error[i], residual[i], used[i]});
  return out;
}

}  // namespace thirdrung
