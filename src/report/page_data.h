#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "report/answer.h"
#include "report/chart_spec.h"

namespace thirdrung {

/// The one JSON value that the page's script builds everything from:
/// `answer` (first screen), `run` (cuts, inputs, version, files), `surveys`, `supernovae` (columns, see below),
/// `sections` of charts, and `lightcurves` (added by page.cpp).
///
/// Columns of `supernovae`: name, survey (number in `surveys`), ra, dec, mx and my (place on the sky map), z_helio,
/// z_cmb, z and ze (z_flow), vpec, ebv, mass, masse, pmass, t0, t0e, m, me, s, se, c, ce, chi2, dof, chir (chi2/dof),
/// prob, p0 and p1 (first and last phase), dm15, m0, m0e (standardised), r, re (residual), rs, rc, rm (residual without
/// the correction for stretch, colour, host mass), infl, infle, w, bands, leftout, remarks, cut, cuts, bad (mistrusted
/// epochs), trusted, used, chauvenet. null: not known.
nlohmann::json page_data(const RunTables& run, const SupernovaRows& all, const Answer& answer,
                         const std::vector<ChartSection>& sections);

/// JSON fit to stand inside an HTML script element: "<", ">", "&" and the line separators of JavaScript are written as
/// escapes.
std::string json_for_script(const nlohmann::json& value);
/// The same for text that is JSON already.
std::string escaped_for_script(const std::string& json_text);

}  // namespace thirdrung
