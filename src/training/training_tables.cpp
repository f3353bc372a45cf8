#include "training/training_tables.h"

namespace thirdrung {

namespace {

/// One column from a list of rows.
template <typename Row, typename Get>
auto column_of(const std::vector<Row>& rows, const Get& get) {
  std::vector<std::decay_t<decltype(get(rows.front()))>> out;
  out.reserve(rows.size());
  for (const Row& row : rows) out.push_back(get(row));
  return out;
}

}  // namespace

Table training_set_table(const TrainingResult& result) {
  const auto& supernovae = result.selection.supernovae;
  const auto& unknowns = result.state.unknowns;
  Table table;
  table.add_strings("supernova", column_of(supernovae, [](const TrainingSupernova& sn) { return sn.name; }));
  table.add_strings("survey", column_of(supernovae, [](const TrainingSupernova& sn) { return sn.survey; }));
  table.add_reals("z_helio", column_of(supernovae, [](const TrainingSupernova& sn) { return sn.z_helio; }));
  table.add_reals("t_0", column_of(unknowns, [](const SupernovaUnknowns& u) { return u.t_0; }), "d");
  table.add_reals("m_b", column_of(unknowns, [](const SupernovaUnknowns& u) { return u.m_b; }), "mag");
  table.add_reals("s", column_of(unknowns, [](const SupernovaUnknowns& u) { return u.s; }));
  table.add_reals("c", column_of(unknowns, [](const SupernovaUnknowns& u) { return u.c; }), "mag");
  table.add_integers("epochs", column_of(supernovae, [](const TrainingSupernova& sn) {
                       return static_cast<std::int64_t>(sn.epochs.size());
                     }));
  std::vector<std::int64_t> fold;
  std::vector<double> chi2;
  for (std::size_t k = 0; k < supernovae.size(); ++k) {
    fold.push_back(fold_of(k, result.folds));
    chi2.push_back(chi2_per_dof(result.state.model, supernovae[k], unknowns[k]));
  }
  table.add_integers("fold", fold);
  table.add_reals("chi2_per_dof", chi2);
  return table;
}

Table left_out_table(const TrainingResult& result) {
  const auto& rows = result.selection.left_out;
  Table table;
  table.add_strings("supernova", column_of(rows, [](const SetAside& row) { return row.supernova; }));
  table.add_strings("survey", column_of(rows, [](const SetAside& row) { return row.survey; }));
  table.add_strings("reason", column_of(rows, [](const SetAside& row) { return row.reason; }));
  return table;
}

Table cross_validation_table(const TrainingResult& result) {
  const auto& rows = result.cross_validation.points;
  using Point = CrossValidationPoint;
  Table table;
  table.add_strings("kind", column_of(rows, [](const Point& p) { return p.kind; }));
  table.add_reals("phi_phase", column_of(rows, [](const Point& p) { return p.smoothness.phi_phase; }));
  table.add_reals("phi_wavelength", column_of(rows, [](const Point& p) { return p.smoothness.phi_wavelength; }));
  table.add_reals("gamma_phase", column_of(rows, [](const Point& p) { return p.smoothness.gamma_phase; }));
  table.add_reals("gamma_wavelength", column_of(rows, [](const Point& p) { return p.smoothness.gamma_wavelength; }));
  table.add_reals("gamma_size", column_of(rows, [](const Point& p) { return p.smoothness.gamma_size; }));
  table.add_reals("colour", column_of(rows, [](const Point& p) { return p.smoothness.colour; }));
  table.add_reals("score", column_of(rows, [](const Point& p) { return p.score; }));
  table.add_reals("gain", column_of(rows, [](const Point& p) { return p.gain; }));
  table.add_reals("gain_error", column_of(rows, [](const Point& p) { return p.gain_error; }));
  table.add_flags("chosen", column_of(rows, [](const Point& p) { return p.chosen; }));
  return table;
}

Table offsets_table(const std::vector<ZeroPointOffset>& rows) {
  Table table;
  table.add_strings("survey", column_of(rows, [](const ZeroPointOffset& o) { return o.survey; }));
  table.add_strings("passband", column_of(rows, [](const ZeroPointOffset& o) { return o.passband; }));
  table.add_reals("offset", column_of(rows, [](const ZeroPointOffset& o) { return o.offset; }), "mag");
  table.add_reals("offset_error", column_of(rows, [](const ZeroPointOffset& o) { return o.error; }), "mag");
  table.add_integers("supernovae",
                     column_of(rows, [](const ZeroPointOffset& o) { return static_cast<std::int64_t>(o.supernovae); }));
  return table;
}

Table error_factors_table(const std::vector<ErrorFactor>& rows) {
  Table table;
  table.add_strings("survey", column_of(rows, [](const ErrorFactor& f) { return f.survey; }));
  table.add_strings("passband", column_of(rows, [](const ErrorFactor& f) { return f.passband; }));
  table.add_reals("error_factor", column_of(rows, [](const ErrorFactor& f) { return f.factor; }));
  table.add_reals("error_factor_error", column_of(rows, [](const ErrorFactor& f) { return f.error; }));
  table.add_integers("supernovae",
                     column_of(rows, [](const ErrorFactor& f) { return static_cast<std::int64_t>(f.supernovae); }));
  table.add_integers("epochs",
                     column_of(rows, [](const ErrorFactor& f) { return static_cast<std::int64_t>(f.epochs); }));
  return table;
}

}  // namespace thirdrung
