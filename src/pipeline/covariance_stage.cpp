#include "pipeline/covariance_stage.h"

#include <fmt/format.h>

#include "base/error.h"
#include "hubbleflow/velocity_covariance.h"
#include "tables/fits_image.h"

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

/// J Sigma J^T with J the derivatives of the magnitudes by alpha, beta, gamma: s - 1, -c, P - 1/2.
CovariancePart coefficients_part(const Magnitudes& magnitudes, const CoefficientCovariance& coefficients) {
  const auto n = static_cast<Eigen::Index>(magnitudes.supernovae.size());
  Eigen::MatrixXd slope = Eigen::MatrixXd::Zero(n, static_cast<Eigen::Index>(coefficients.names.size()));
  for (std::size_t k = 0; k < coefficients.names.size(); ++k) {
    for (Eigen::Index i = 0; i < n; ++i) {
      const auto row = static_cast<std::size_t>(i);
      const FlowSupernova& one = magnitudes.supernovae[row];
      const std::string& name = coefficients.names[k];
      slope(i, static_cast<Eigen::Index>(k)) = name == "alpha"   ? one.s - 1.0
                                               : name == "beta"  ? -one.c
                                               : name == "gamma" ? magnitudes.mass_probability[row] - 0.5
                                                                 : 0.0;
    }
  }
  CovariancePart part;
  part.name = "standardisation coefficients";
  part.weighs = false;  // Weights that knew of it would fit the coefficients anew, to the residuals.
  part.weighs = false;
  part.matrix = slope * coefficients.covariance * slope.transpose();
  part.matrix = (0.5 * (part.matrix + part.matrix.transpose())).eval();
  return part;
}

CovariancePart diagonal_part(std::string name, const Eigen::VectorXd& variance) {
  CovariancePart part;
  part.name = std::move(name);
  part.diagonal = variance;
  return part;
}

}  // namespace

void write_coefficient_covariance(const CoefficientCovariance& coefficients, const std::filesystem::path& path) {
  FitsWriter writer;
  add_matrix(writer, "covariance", coefficients.covariance, "", "of the parameters in the order of the table");
  writer.add_table(names_table("parameter", coefficients.names), "parameters");
  writer.write(path);
}

CoefficientCovariance read_coefficient_covariance(const std::filesystem::path& path) {
  const FitsReader reader(path);
  CoefficientCovariance out;
  out.names = reader.table("parameters").strings("parameter");
  const FitsImage image = reader.image("covariance");
  const std::size_t n = out.names.size();
  if (image.shape != std::vector<std::size_t>{n, n}) {
    throw InputError({path.string(), std::nullopt, "covariance"},
                     fmt::format("the covariance is not {} by {}, as its table of parameters says", n, n),
                     "run the standardisation again");
  }
  out.covariance = Eigen::Map<const Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>>(
      image.values.data(), static_cast<Eigen::Index>(n), static_cast<Eigen::Index>(n));
  return out;
}

CovarianceModel make_covariance(const RunFile& run, const Magnitudes& magnitudes,
                                const CoefficientCovariance& coefficients, std::vector<SystematicShift> systematics) {
  const Expansion& expansion = run.intercept.options.flow.expansion;
  CovarianceModel model;
  for (const FlowSupernova& one : magnitudes.supernovae) model.supernovae.push_back(one.name);
  model.parts.push_back(diagonal_part("light-curve fits", magnitudes.fit_variance));
  model.parts.push_back(diagonal_part("intrinsic scatter", magnitudes.intrinsic_variance));
  CovariancePart velocities =
      velocity_scatter_part(magnitudes.supernovae, expansion, run.redshift.options.sigma_v, magnitudes.z_helio_error);
  velocities.name = "peculiar velocities and redshift errors";
  model.parts.push_back(std::move(velocities));
  if (run.intercept.velocity_covariance) {
    VelocityCovarianceOptions options;
    options.amplitude = run.intercept.velocity_amplitude;
    options.smoothing = run.intercept.velocity_smoothing;
    options.threads = run.threads;
    CovariancePart flows;
    flows.name = "coherent flows";
    flows.matrix = velocity_covariance(magnitudes.supernovae, expansion, options);
    model.parts.push_back(std::move(flows));
  }
  if (!coefficients.names.empty()) model.parts.push_back(coefficients_part(magnitudes, coefficients));
  model.systematics = std::move(systematics);
  check_covariance_model(model);
  return model;
}

void write_covariance(const CovarianceModel& model, const std::filesystem::path& path) {
  FitsWriter writer;
  add_matrix(writer, "total", model.total(), "mag2", "of the standardised magnitudes, all parts");
  add_matrix(writer, "statistical", model.statistical(), "mag2", "sum of the statistical parts");
  add_matrix(writer, "weighting", model.weighting(), "mag2", "what the weights of a_b are made from");
  add_matrix(writer, "systematic", model.systematic(), "mag2", "sum over the systematics");
  writer.add_table(names_table("supernova", model.supernovae), "supernovae");
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
  if (!model.systematics.empty()) {
    Eigen::MatrixXd shifts(static_cast<Eigen::Index>(model.systematics.size()), n);
    std::vector<std::string> names, kinds, units;
    std::vector<double> sizes;
    for (std::size_t k = 0; k < model.systematics.size(); ++k) {
      const SystematicShift& one = model.systematics[k];
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
  writer.write(path);
}

}  // namespace thirdrung
