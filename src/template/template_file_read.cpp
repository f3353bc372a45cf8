#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "tables/fits_image.h"
#include "template/template_file.h"
#include "template/template_file_parts.h"

namespace thirdrung {

namespace parts = template_parts;

namespace {

using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

[[noreturn]] void fail(const FitsReader& reader, const std::string& fault,
                       const std::string& remedy = "get the template file anew") {
  throw InputError({reader.file(), {}, {}}, fault, remedy);
}

std::vector<double> values_of(const FitsReader& reader, const char* part, const std::vector<std::size_t>& shape) {
  FitsImage image = reader.image(part);
  if (image.shape != shape) {
    fail(reader, fmt::format("part {} has the shape {}, its grids ask for {}", part, fmt::join(image.shape, " x "),
                             fmt::join(shape, " x ")));
  }
  for (std::size_t i = 0; i < image.values.size(); ++i) {
    if (!std::isfinite(image.values[i])) fail(reader, fmt::format("part {} is not finite at element {}", part, i + 1));
  }
  return std::move(image.values);
}

RowMajor matrix(const FitsReader& reader, const char* part, std::size_t rows, std::size_t columns) {
  const std::vector<double> values = values_of(reader, part, {rows, columns});
  return Eigen::Map<const RowMajor>(values.data(), static_cast<Eigen::Index>(rows), static_cast<Eigen::Index>(columns));
}

RowMajor matrix(const FitsReader& reader, const char* part, int rows, int columns) {
  return matrix(reader, part, static_cast<std::size_t>(rows), static_cast<std::size_t>(columns));
}

Eigen::VectorXd vector(const FitsReader& reader, const char* part, std::size_t size) {
  const std::vector<double> values = values_of(reader, part, {size});
  return Eigen::Map<const Eigen::VectorXd>(values.data(), static_cast<Eigen::Index>(size));
}

/// At least two increasing numbers.
std::vector<double> grid(const FitsReader& reader, const char* part) {
  FitsImage image = reader.image(part);
  const std::vector<double>& x = image.values;
  bool sound = image.shape.size() == 1 && x.size() >= 2 && std::isfinite(x.front()) && std::isfinite(x.back());
  for (std::size_t i = 1; sound && i < x.size(); ++i) sound = x[i] > x[i - 1];
  if (!sound) fail(reader, fmt::format("part {} is not a list of two or more increasing numbers", part));
  return std::move(image.values);
}

void read_coefficients(const FitsReader& reader, SpectralTemplate& model) {
  model.phase_basis = CubicBasis(grid(reader, parts::phi_phase));
  model.wavelength_basis = CubicBasis(grid(reader, parts::phi_wavelength));
  model.stretch_phase_basis = CubicBasis(grid(reader, parts::gamma_phase));
  model.stretch_wavelength_basis = CubicBasis(grid(reader, parts::gamma_wavelength));
  model.colour_basis = CubicBasis(grid(reader, parts::colour_wavelength));
  const CoefficientLayout layout(model);
  model.log_flux = matrix(reader, parts::phi, layout.phi_phases, layout.phi_wavelengths);
  model.stretch_response = matrix(reader, parts::gamma, layout.gamma_phases, layout.gamma_wavelengths);
  model.colour_law = vector(reader, parts::colour, static_cast<std::size_t>(layout.colours));
}

void read_scatter(const FitsReader& reader, SpectralTemplate& model) {
  if (reader.required_keyword("scatter") != "T") return;
  model.scatter_phase = grid(reader, parts::epoch_scatter_phase);
  model.scatter_wavelength = grid(reader, parts::epoch_scatter_wavelength);
  model.log_epoch_scatter =
      matrix(reader, parts::epoch_scatter, model.scatter_phase.size(), model.scatter_wavelength.size());
  model.colour_scatter_wavelength = grid(reader, parts::colour_scatter_wavelength);
  model.log_colour_scatter = vector(reader, parts::colour_scatter, model.colour_scatter_wavelength.size());
}

void read_gauge(const FitsReader& reader, SpectralTemplate& model) {
  const Table table = reader.table(parts::gauge);
  model.gauge_wavelength = table.reals("wavelength");
  model.gauge_weight_b = table.reals("weight_b");
  model.gauge_weight_v = table.reals("weight_v");
  const auto finite = [](double x) { return std::isfinite(x); };
  for (const auto* column : {&model.gauge_wavelength, &model.gauge_weight_b, &model.gauge_weight_v}) {
    if (column->empty() || !std::all_of(column->begin(), column->end(), finite)) {
      fail(reader, fmt::format("part {} has missing values", parts::gauge));
    }
  }
}

std::size_t count_keyword(const FitsReader& reader, const std::string& key, double largest) {
  const double value = reader.real_keyword(key);
  if (!(value >= 0 && value <= largest)) fail(reader, fmt::format("its keyword {} is {}", key, value));
  return static_cast<std::size_t>(value);
}

void read_header(const FitsReader& reader, SpectralTemplate& model) {
  if (reader.keyword("content").value_or("") != parts::content) {
    fail(reader, "is not a template file", "name the FITS file of a template");
  }
  const double layout = reader.real_keyword("layout");
  if (layout != static_cast<double>(parts::layout)) {
    fail(reader, fmt::format("has layout {} where this version of the program reads layout {}", layout, parts::layout),
         "use a template that belongs to this version");
  }
  model.name = reader.required_keyword("name");
  model.phase_min = reader.real_keyword("phasemin");
  model.phase_max = reader.real_keyword("phasemax");
  model.wavelength_min = reader.real_keyword("wavemin");
  model.wavelength_max = reader.real_keyword("wavemax");
  if (!(model.phase_min < model.phase_max) || !(model.wavelength_min < model.wavelength_max)) {
    fail(reader, "covers no phases or no wavelengths by its keywords PHASEMIN, PHASEMAX, WAVEMIN, WAVEMAX");
  }
  const std::size_t pairs = count_keyword(reader, "nprov", 9999);
  for (std::size_t i = 1; i <= pairs; ++i) {
    model.provenance.emplace_back(reader.required_keyword(fmt::format("pkey{}", i)),
                                  reader.required_keyword(fmt::format("pval{}", i)));
  }
}

void read_uncertainty(const FitsReader& reader, TrainedTemplate& trained) {
  const auto size = static_cast<std::size_t>(CoefficientLayout(trained.model).size());
  const std::size_t modes = count_keyword(reader, "modes", 1e6);
  if (modes > 0) trained.covariance_modes = matrix(reader, parts::modes, modes, size).transpose();
  const std::size_t bands = count_keyword(reader, "bands", 1e6);
  if (bands == 0) return;
  const std::vector<std::string> passbands = reader.table(parts::response_passbands).strings("passband");
  if (passbands.size() != bands) {
    fail(reader, fmt::format("part {} names {} passbands, the keyword BANDS says {}", parts::response_passbands,
                             passbands.size(), bands));
  }
  const RowMajor zero_point = matrix(reader, parts::response_zero_point, bands, size);
  const RowMajor wavelength = matrix(reader, parts::response_wavelength, bands, size);
  for (std::size_t i = 0; i < bands; ++i) {
    const auto row = static_cast<Eigen::Index>(i);
    trained.responses.push_back({passbands[i], zero_point.row(row).transpose(), wavelength.row(row).transpose()});
  }
}

void check_gauge(const FitsReader& reader, const SpectralTemplate& model) {
  const GaugeErrors errors = gauge_errors(model);
  const std::pair<double, const char*> conditions[] = {
      {errors.peak_phase, "B maximum at phase 0 [d]"},
      {errors.peak_magnitude, "B magnitude 0 at maximum"},
      {errors.colour_b, "mean of the colour law over B 0"},
      {errors.colour_v, "mean of the colour law over V -1"},
      {errors.stretch_at_peak, "stretch response 0 in B at maximum"},
      {errors.stretch_at_15, "stretch response 0 in B at 15 d"},
  };
  std::vector<std::string> violated;
  for (const auto& [error, condition] : conditions) {
    if (!(std::abs(error) < template_gauge_tolerance)) {
      violated.push_back(fmt::format("{} (off by {:.2g})", condition, error));
    }
  }
  if (violated.empty()) return;
  fail(reader,
       fmt::format("violates its gauge, so that m_B, s and c would not mean what they say: {}",
                   fmt::join(violated, "; ")),
       "train it again or get the template file anew");
}

}  // namespace

TrainedTemplate read_template(const std::filesystem::path& path) {
  const FitsReader reader(path);
  TrainedTemplate out;
  read_header(reader, out.model);
  read_coefficients(reader, out.model);
  read_scatter(reader, out.model);
  read_gauge(reader, out.model);
  read_uncertainty(reader, out);
  check_gauge(reader, out.model);
  return out;
}

}  // namespace thirdrung
