#include "report/page_data.h"

#include <cmath>

#include "report/digits.h"
#include "report/sky_map.h"

namespace thirdrung {
namespace {

using nlohmann::json;

json number(double value, int digits = 6) {
  return std::isfinite(value) ? json(rounded(value, digits)) : json(nullptr);
}

json real_columns(const SupernovaRows& all) {
  struct Field {
    const char* name;
    double SupernovaRow::*member;
    int digits;
  };
  const Field fields[] = {{"ra", &SupernovaRow::ra, 8},
                          {"dec", &SupernovaRow::dec, 8},
                          {"z_helio", &SupernovaRow::z_helio, 6},
                          {"z_cmb", &SupernovaRow::z_cmb, 6},
                          {"z", &SupernovaRow::z_flow, 6},
                          {"ze", &SupernovaRow::z_flow_error, 3},
                          {"vpec", &SupernovaRow::v_pec, 4},
                          {"ebv", &SupernovaRow::mw_ebv, 4},
                          {"mass", &SupernovaRow::host_log_mass, 5},
                          {"masse", &SupernovaRow::host_log_mass_error, 3},
                          {"pmass", &SupernovaRow::host_mass_probability, 4},
                          {"t0", &SupernovaRow::t_0, 8},
                          {"t0e", &SupernovaRow::t_0_error, 3},
                          {"m", &SupernovaRow::m_b, 6},
                          {"me", &SupernovaRow::m_b_error, 4},
                          {"s", &SupernovaRow::s, 5},
                          {"se", &SupernovaRow::s_error, 4},
                          {"c", &SupernovaRow::c, 5},
                          {"ce", &SupernovaRow::c_error, 4},
                          {"chi2", &SupernovaRow::chi2, 5},
                          {"dof", &SupernovaRow::dof, 6},
                          {"prob", &SupernovaRow::fit_probability, 4},
                          {"p0", &SupernovaRow::first_phase, 4},
                          {"p1", &SupernovaRow::last_phase, 4},
                          {"dm15", &SupernovaRow::dm15_b, 4},
                          {"m0", &SupernovaRow::m_standard, 7},
                          {"m0e", &SupernovaRow::m_standard_error, 4},
                          {"r", &SupernovaRow::residual, 5},
                          {"re", &SupernovaRow::residual_error, 4},
                          {"infl", &SupernovaRow::influence, 4},
                          {"infle", &SupernovaRow::influence_error, 4},
                          {"w", &SupernovaRow::weight, 4}};
  json columns = json::object();
  for (const Field& field : fields) {
    json& column = columns[field.name] = json::array();
    for (const SupernovaRow& row : all.rows) column.push_back(number(row.*field.member, field.digits));
  }
  return columns;
}

void add_texts(const SupernovaRows& all, json& columns) {
  struct Field {
    const char* name;
    std::string SupernovaRow::*member;
  };
  const Field fields[] = {{"name", &SupernovaRow::name},
                          {"bands", &SupernovaRow::bands},
                          {"leftout", &SupernovaRow::bands_left_out},
                          {"remarks", &SupernovaRow::remarks},
                          {"cut", &SupernovaRow::removed_by},
                          {"cuts", &SupernovaRow::removed_by_all}};
  for (const Field& field : fields) {
    json& column = columns[field.name] = json::array();
    for (const SupernovaRow& row : all.rows) column.push_back(row.*field.member);
  }
}

void add_derived(const RunTables& run, const SupernovaRows& all, json& columns) {
  std::map<std::string, std::size_t> survey_number;
  for (std::size_t i = 0; i < all.surveys.size(); ++i) survey_number[all.surveys[i]] = i;
  const double alpha = run.summary.parameter("alpha").value, beta = run.summary.parameter("beta").value,
               gamma = run.summary.parameter("gamma").value;
  for (const SupernovaRow& row : all.rows) {
    columns["survey"].push_back(survey_number[row.survey]);
    const bool placed = std::isfinite(row.ra) && std::isfinite(row.dec);
    const MapPoint point = placed ? on_sky_map(row.ra, row.dec) : MapPoint{};
    columns["mx"].push_back(placed ? number(point.x, 5) : json(nullptr));
    columns["my"].push_back(placed ? number(point.y, 5) : json(nullptr));
    columns["chir"].push_back(row.dof > 0 ? number(row.chi2 / row.dof, 4) : json(nullptr));
    columns["rs"].push_back(number(residual_without(row, "alpha", alpha), 5));
    columns["rc"].push_back(number(residual_without(row, "beta", beta), 5));
    columns["rm"].push_back(number(residual_without(row, "gamma", gamma), 5));
    columns["bad"].push_back(row.mistrusted_epochs);
    columns["trusted"].push_back(row.trusted);
    columns["used"].push_back(row.used);
    columns["chauvenet"].push_back(row.chauvenet_mistrusted);
  }
}

json answer_data(const Answer& answer) {
  json facts = json::array();
  if (!answer.absolute_magnitude.empty()) facts.push_back({"M_B", answer.absolute_magnitude});
  for (const auto& [label, value] : answer.facts) facts.push_back({label, value});
  return {{"known", answer.known},        {"blind", answer.blind},    {"value", answer.symbol_value},
          {"stat", answer.statistical},   {"sys", answer.systematic}, {"total", answer.total},
          {"h0", answer.hubble_constant}, {"facts", facts},           {"qualifications", answer.qualifications},
          {"warnings", answer.warnings}};
}

json run_data(const RunTables& run) {
  json cuts = json::array(), inputs = json::array();
  for (const CutLine& cut : run.summary.cuts)
    cuts.push_back({cut.rule, cut.removed_alone, cut.removed_in_order, cut.left});
  for (const auto& [file, sha256] : run.summary.inputs) inputs.push_back({file, sha256});
  return {{"cuts", cuts}, {"inputs", inputs}, {"version", run.summary.version}, {"files", run.summary.files}};
}

}  // namespace

json page_data(const RunTables& run, const SupernovaRows& all, const Answer& answer,
               const std::vector<ChartSection>& sections) {
  json columns = real_columns(all);
  add_texts(all, columns);
  add_derived(run, all, columns);
  json section_list = json::array();
  for (const ChartSection& section : sections) {
    if (section.charts.empty()) continue;
    json charts = json::array();
    for (const Chart& chart : section.charts) {
      charts.push_back({{"id", chart.id},
                        {"title", chart.title},
                        {"caption", chart.caption},
                        {"size", chart.size},
                        {"height", chart.height},
                        {"spec", chart.spec},
                        {"csv", chart.csv},
                        {"brush", chart.brush_field}});
    }
    section_list.push_back({{"id", section.id}, {"title", section.title}, {"lead", section.lead}, {"charts", charts}});
  }
  return {{"answer", answer_data(answer)}, {"run", run_data(run)},  {"surveys", all.surveys},
          {"count", all.rows.size()},      {"supernovae", columns}, {"sections", section_list}};
}

std::string escaped_for_script(const std::string& json_text) {
  std::string result;
  result.reserve(json_text.size());
  for (std::size_t i = 0; i < json_text.size(); ++i) {
    const char c = json_text[i];
    if (c == '<')
      result += "\\u003c";
    else if (c == '>')
      result += "\\u003e";
    else if (c == '&')
      result += "\\u0026";
    else if (json_text.compare(i, 3, "\xE2\x80\xA8") == 0)
      result += "\\u2028", i += 2;
    else if (json_text.compare(i, 3, "\xE2\x80\xA9") == 0)
      result += "\\u2029", i += 2;
    else
      result += c;
  }
  return result;
}

std::string json_for_script(const json& value) {
  // Text that is not UTF-8 is shown with the replacement character rather than refused: the page is the last place to
  // fail.
  return escaped_for_script(value.dump(-1, ' ', false, json::error_handler_t::replace));
}

}  // namespace thirdrung
