#pragma once

#include <cstdint>
#include <filesystem>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "hubbleflow/intercept.h"
#include "hubbleflow/scans.h"
#include "light/dust_law.h"
#include "lightcurve/fit.h"
#include "pipeline/error_scale.h"
#include "pipeline/input_file.h"
#include "sample/quality_cuts.h"
#include "sample/redshift_frames.h"
#include "sample/sky_reddening.h"
#include "sky/dust_map.h"
#include "standardisation/hierarchical.h"
#include "standardisation/selection.h"

namespace thirdrung {

/// [[survey]]: photometry and the supernovae that it is of.
struct SurveyInput {
  std::string name;
  InputFile photometry;  ///< A table, or a folder of tables.
  InputFile supernovae;
  ErrorScale error_scale;
};

/// [milky_way]: dust between us and the supernovae.
struct MilkyWayInput {
  DustLaw law = DustLaw::fitzpatrick99;
  double r_v = 3.1;
  ReddeningSource source = ReddeningSource::table;
  InputFile map_north, map_south;  ///< Lambert pair; or
  InputFile map_healpix;           ///< HEALPix.
  DustMapOptions map;
  double scale = 1.0;  ///< Multiplies every reddening, from table and map alike, after everything else.

  bool has_map() const { return map_north.given() || map_healpix.given(); }
};

/// [redshift]: from the heliocentric redshift to that of the smooth expansion.
struct RedshiftInput {
  RedshiftOptions options;  ///< Its grid is read later, from velocity_field.
  InputFile velocity_field;
  VelocityGridOptions grid;
};

/// [standardisation].
struct StandardisationInput {
  bool ordinary = false;  ///< The ordinary fit, for comparison; the hierarchical one otherwise.
  HierarchicalOptions options;
};

/// [intercept]: beyond the numbers of the generalised least squares, what the covariance holds.
struct InterceptInput {
  InterceptOptions options;
  bool velocity_covariance = false;  ///< Linear-theory covariance of peculiar velocities.
  double velocity_amplitude = 1.0;   ///< Its scale; less than 1 for what a subtracted field leaves.
  double velocity_smoothing = 4.0;   ///< [Mpc/h].
};

/// What a [[systematic]] moves.
enum class SystematicKind {
  zero_point,
  wavelength,
  milky_way_scale,
  milky_way_zero,
  dust_law,
  template_training,
  template_file,
  redshift,
  velocity_strength,
  velocity_source,
  velocity_scatter,
  sun_motion,
  mass_step,
  mass_offset,
  population,
  selection_limit,
  q0,
  j0
};

/// [[systematic]]: one uncertain input, or one for each passband in its scope.
struct SystematicInput {
  SystematicKind kind = SystematicKind::zero_point;
  std::string name;                    ///< For the tables; made from kind and scope if the run file gives none.
  std::optional<double> size;          ///< 1 sigma; nothing: the passband catalogue's own errors.
  std::vector<std::string> surveys;    ///< Scope; empty: all.
  std::vector<std::string> passbands;  ///< Scope; empty: all.
  bool together = false;               ///< One error common to the passbands in scope, rather than one each.
  InputFile file;                      ///< template_file: the other template; velocity_source: the other field.
  VelocitySource velocity = VelocitySource::none;  ///< velocity_source: the other one.
  Place place;
};

/// [scans]: what is varied, and how far out in redshift supernovae are kept for it.
struct ScansInput {
  bool wanted = false;
  std::vector<ScanAxis> axes;
  bool corrections = true;  ///< Each correction switched off in turn.
  bool cuts = true;         ///< Each cut loosened and tightened.
  double z_min = 0.01, z_max = 0.2;
};

/// [join]: to H0, from a_B and a calibrated absolute magnitude, or from calibrators of the run.
struct JoinInput {
  bool wanted = false;
  double m_b = 0.0, m_b_error = 0.0;  ///< [mag].
  InputFile calibrators;              ///< If given: the table of calibrators and their distances, instead of m_b;
  InputFile covariance;               ///< and the covariance of the latter, optional.
};

/// [report].
struct ReportInput {
  bool page = true;
  std::string title;
  bool figures = false;
  bool light_curves = true;  ///< Write the points and curves of every light curve.
};

/// A run, as its TOML file describes it; docs/run-file.md lists every key.
struct RunFile {
  std::filesystem::path path;
  std::string text;                             ///< As it stands on disk.
  std::map<std::string, std::string> sections;  ///< Text of every section in one normal form, "" where absent.

  std::string name;
  std::filesystem::path output;
  int threads = 0;  ///< 0: all cores.
  std::uint64_t seed = 1;
  bool blind = false;        ///< By default if the run joins.
  bool blind_given = false;  ///< The run file says so itself, either way.
  std::string phrase;        ///< That the hidden offset of a blind run comes from.

  InputFile template_file;
  InputFile passband_catalogue;
  InputFile standard_star;  ///< Optional.
  std::vector<SurveyInput> surveys;
  MilkyWayInput milky_way;
  FitOptions lightcurve;
  RedshiftInput redshift;
  CutLimits cuts;  ///< Its redshift range is that of [intercept].
  StandardisationInput standardisation;
  MagnitudeLimits magnitude_limits;  ///< [[selection]], by survey.
  InterceptInput intercept;
  std::vector<SystematicInput> systematics;
  bool refit_with_systematics = true;  ///< Coefficients refitted with every shifted input; else held.
  ScansInput scans;
  JoinInput join;
  ReportInput report;
};

/// Reads a run file. Throws InputError with file, line and key for anything it does not know, with the nearest key
/// that it does know; the files that it names are not opened yet.
RunFile read_run_file(const std::filesystem::path& path);

/// The kind a [[systematic]] is called by, and the way back (InputError at `place` naming the nearest).
std::string name_of(SystematicKind kind);
SystematicKind systematic_kind(const std::string& name, const Place& place);

}  // namespace thirdrung
