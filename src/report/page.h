#pragma once

#include <filesystem>
#include <string>

#include "report/vega_bundle.h"

namespace thirdrung {

struct PageOptions {
  std::filesystem::path folder;                            ///< Output folder of a run; its result tables are read.
  std::filesystem::path output;                            ///< The HTML file; empty: report.html in the folder.
  std::string title = "Hubble-flow supernovae";            ///< Heading of the page, any text.
  std::filesystem::path vega_folder = debian_vega_folder;  ///< Where the chart library is read from.
  /// Up to so many supernovae their light curves stand in the page itself; beyond, in script files beside it.
  std::size_t lightcurves_inside = 400;
  std::size_t lightcurves_a_file = 60;  ///< Supernovae in each of those files.
};

struct PageResult {
  std::filesystem::path page;
  /// Folder of the light-curve files, `<name of the page>-lightcurves`; empty if they stand in the page.
  std::filesystem::path lightcurve_folder;
  std::size_t bytes = 0;  ///< Size of the page.
};

/// Writes the page of a run: one HTML file that needs nothing but a browser, and no network.
///
/// Sections appear for the tables that the folder holds. Names and remarks are data to the page, never markup: they
/// reach it as JSON and are set as text; besides, the page forbids every script but its own and every request
/// (Content-Security-Policy). The same tables give the same bytes. For more than `lightcurves_inside` supernovae the
/// light curves go into script files beside the page, loaded when they are looked at, which works from disk; files of
/// an earlier page there are replaced.
///
/// Throws InputError if the folder holds no result, a table is malformed, or the chart library is absent; OutputError
/// if a file cannot be written.
PageResult write_page(const PageOptions& options);

}  // namespace thirdrung
