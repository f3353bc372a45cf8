#include <cmath>

#include "hubbleflow/covariance_fits.h"
#include "ladder/solve_ladder.h"

namespace thirdrung {

namespace {

/// Revision of the layout, for readers.
constexpr std::int64_t layout = 1;

Table rows_table(const LadderBlock& block) {
  std::vector<std::string> kind, name, host;
  for (const LadderRow& row : block.rows) {
    kind.push_back(name_of(row.kind));
    name.push_back(row.name);
    host.push_back(row.host);
  }
  Table out;
  out.add_strings("kind", kind, "calibrator, hubble_flow or host");
  out.add_strings("name", name, "of the supernova, or of the host");
  out.add_strings("host", host, "of calibrators and hosts");
  return out;
}

Table parameters_table(const LadderBlock& block, const LadderSolution& solution) {
  std::vector<std::string> name, unit;
  std::vector<double> value, error;
  for (std::size_t k = 0; k < block.parameters.size(); ++k) {
    const auto place = static_cast<Eigen::Index>(k);
    name.push_back(block.parameters[k].name);
    unit.push_back(block.parameters[k].unit);
    value.push_back(solution.theta(place));
    error.push_back(std::sqrt(solution.covariance(place, place)));
  }
  Table out;
  out.add_strings("name", name).add_strings("unit_of_value", unit);
  out.add_reals("value", value, "", "of this block alone").add_reals("error", error, "", "1 sigma");
  return out;
}

}  // namespace

void write_ladder_block(const LadderBlock& block, const LadderSolution& solution, bool blind,
                        const std::filesystem::path& path) {
  FitsWriter writer;
  writer.add_keyword({"layout", layout, "revision of the ladder block"});
  writer.add_keyword({"blind", blind, "magnitudes carry hidden constants"});
  writer.add_keyword({"h0", solution.h0, "km/s/Mpc, of this block alone"});
  writer.add_keyword({"h0_error", solution.h0_error, "km/s/Mpc, 1 sigma"});
  const std::vector<double> y(block.y.begin(), block.y.end());
  writer.add_image("y", {y.size()}, y, "mag", "the data");
  add_matrix(writer, "L", block.design, "", "derivatives of y by the parameters, one column each");
  add_matrix(writer, "C", block.uncertainty.total(), "mag2", "covariance of y, all parts");
  add_matrix(writer, "W", block.uncertainty.weighting(), "mag2", "what the weights are made from");
  add_matrix(writer, "statistical", block.uncertainty.statistical(), "mag2", "sum of the statistical parts");
  add_matrix(writer, "systematic", block.uncertainty.systematic(), "mag2", "sum over the systematics");
  add_matrix(writer, "covariance_of_parameters", solution.covariance, "", "of this block alone");
  writer.add_table(rows_table(block), "rows");
  writer.add_table(parameters_table(block, solution), "parameters");
  add_covariance_parts(writer, block.uncertainty);
  writer.write(path);
}

}  // namespace thirdrung
