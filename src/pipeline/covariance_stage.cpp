#include "pipeline/covariance_stage.h"

#include <fmt/format.h>

#include "base/error.h"
#include "hubbleflow/covariance_fits.h"
#include "hubbleflow/velocity_covariance.h"
#include "tables/fits_image.h"

namespace thirdrung {

namespace {

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
  part.matrix = slope * coefficients.covariance * slope.transpose();
  part.matrix = (0.5 * (part.matrix + part.matrix.transpose())).eval();
  return part;
}

CovarianceModel make_covariance(const RunFile& run, const Magnitudes& magnitudes,
                                const CoefficientCovariance& coefficients, std::vector<SystematicShift> systematics) {
  const Expansion& expansion = run.intercept.options.flow.expansion;
  CovarianceModel model;
  for (const FlowSupernova& one : magnitudes.supernovae) model.supernovae.push_back(one.name);
  model.parts.push_back(diagonal_part(light_curve_part, magnitudes.fit_variance));
  model.parts.push_back(diagonal_part(intrinsic_part, magnitudes.intrinsic_variance));
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
  add_covariance_parts(writer, model);
  writer.write(path);
}

}  // namespace thirdrung
