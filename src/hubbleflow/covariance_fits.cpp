#include "hubbleflow/covariance_fits.h"

#include <fmt/format.h>

namespace thirdrung {

namespace {

/// Rows one after the other, as FitsWriter wants them.
std::vector<double> row_by_row(const Eigen::MatrixXd& matrix) {
  std::vector<double> out;
  out.reserve(static_cast<std::size_t>(matrix.size()));
  for (Eigen::Index i = 0; i < matrix.rows(); ++i) {
    for (Eigen::Index j = 0; j < matrix.cols(); ++j) out.push_back(matrix(i, j));
  }
  return out;
}

void add_statistical_parts(FitsWriter& writer, const CovarianceModel& model) {
  const auto n = static_cast<Eigen::Index>(model.supernovae.size());
  std::vector<std::string> diagonal_names, matrix_names, matrix_parts;
  Eigen::MatrixXd diagonals(0, n);
  for (const CovariancePart& part : model.parts) {
    if (part.matrix.size() == 0) {
      diagonal_names.push_back(part.name);
      diagonals.conservativeResize(diagonals.rows() + 1, n);
      diagonals.bottomRows(1) = part.diagonal.transpose();
    } else {
      matrix_names.push_back(part.name);
      matrix_parts.push_back(fmt::format("part{}", matrix_parts.size() + 1));
      add_matrix(writer, matrix_parts.back(), part.matrix, "mag2", part.name);
    }
  }
  add_matrix(writer, "diagonals", diagonals, "mag2", "parts without correlations, one row each");
  writer.add_table(names_table("name", diagonal_names), "diagonal_parts");
  if (!matrix_names.empty()) {
    Table table = names_table("name", matrix_names);
    table.add_strings("image", matrix_parts);
    writer.add_table(table, "matrix_parts");
  }
}

void add_shifts(FitsWriter& writer, const std::vector<SystematicShift>& systematics) {
  const Eigen::Index n = systematics.front().shift.size();
  Eigen::MatrixXd shifts(static_cast<Eigen::Index>(systematics.size()), n);
  std::vector<std::string> names, kinds, units;
  std::vector<double> sizes;
  for (std::size_t k = 0; k < systematics.size(); ++k) {
    const SystematicShift& one = systematics[k];
    shifts.row(static_cast<Eigen::Index>(k)) = one.shift.transpose();
    names.push_back(one.name);
    kinds.push_back(one.kind);
    sizes.push_back(one.size);
    units.push_back(one.unit);
  }
  add_matrix(writer, "shifts", shifts, "mag", "of every magnitude for +1 sigma, one row a systematic");
  Table table = names_table("name", names);
  table.add_strings("kind", kinds).add_reals("size", sizes).add_strings("unit_of_size", units);
  writer.add_table(table, "systematics");
}

}  // namespace

void add_matrix(FitsWriter& writer, const std::string& name, const Eigen::MatrixXd& matrix, const std::string& unit,
                const std::string& comment) {
  writer.add_image(name, {static_cast<std::size_t>(matrix.rows()), static_cast<std::size_t>(matrix.cols())},
                   row_by_row(matrix), unit, comment);
}

Table names_table(const std::string& column, const std::vector<std::string>& names) {
  Table table;
  table.add_strings(column, names);
  return table;
}

void add_covariance_parts(FitsWriter& writer, const CovarianceModel& model) {
  add_statistical_parts(writer, model);
  if (!model.systematics.empty()) add_shifts(writer, model.systematics);
}

}  // namespace thirdrung
