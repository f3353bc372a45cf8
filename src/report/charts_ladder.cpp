// The calibrators of a ladder, each with the absolute magnitude that it alone gives, and where the error of H0 comes
// from.
#include <fmt/format.h>

#include "report/bar_chart.h"
#include "report/chart_spec.h"
#include "report/digits.h"
#include "report/ladder_rows.h"
#include "report/spec_parts.h"

namespace thirdrung {
namespace {

using nlohmann::json;

json number_mark() {
  return {{"type", "text"},
          {"interactive", false},
          {"from", {{"data", "rows"}}},
          {"encode",
           {{"update",
             {{"x", {{"signal", "width"}}},
              {"y", {{"scale", "y"}, {"field", "k"}}},
              {"align", {{"value", "right"}}},
              {"baseline", {{"value", "middle"}}},
              {"fontSize", {{"value", 11}}},
              {"opacity", {{"signal", "room > 0 ? 1 : 0"}}},
              {"fill", {{"value", "@ink"}}},
              {"text", {{"field", "text"}}}}}}}};
}

/// M_B of the whole ladder, with a band of its error.
json answer_marks(const Measured& m_b) {
  const json height = {{"signal", "height"}};
  json band = {{"type", "rect"},
               {"interactive", false},
               {"clip", true},
               {"encode",
                {{"update",
                  {{"x", {{"scale", "x"}, {"value", m_b.value - m_b.error}}},
                   {"x2", {{"scale", "x"}, {"value", m_b.value + m_b.error}}},
                   {"y", {{"value", 0}}},
                   {"y2", height},
                   {"fill", {{"value", "@muted"}}},
                   {"opacity", {{"value", 0.15}}}}}}}};
  json line = {{"type", "rule"},
               {"interactive", false},
               {"clip", true},
               {"encode",
                {{"update",
                  {{"x", {{"scale", "x"}, {"value", m_b.value}}},
                   {"y", {{"value", 0}}},
                   {"y2", height},
                   {"stroke", {{"value", "@ink"}}}}}}}};
  return json::array({band, line});
}

Chart calibrator_chart(const ChartInput& input) {
  const LadderRows ladder = ladder_rows(input.run);
  json rows = json::array(), order = json::array(), labels = json::array(), csv = json::array();
  std::vector<double> values{ladder.m_b.value}, errors{ladder.m_b.error};
  for (const CalibratorRow& one : ladder.calibrators) {
    csv.push_back({one.supernova, one.host, one.modulus, one.modulus_error, one.absolute, one.absolute_error,
                   one.residual, one.used, one.why_not});
    if (!one.used) continue;
    const std::size_t k = order.size();
    order.push_back(k);
    labels.push_back(one.supernova);
    values.push_back(one.absolute);
    errors.push_back(one.absolute_error);
    rows.push_back({{"k", k},
                    {"x", rounded(one.absolute, 7)},
                    {"e", rounded(one.absolute_error, 4)},
                    {"text", signed_with_error(one.residual, one.absolute_error)},
                    {"tip", fmt::format("{} in {}\nM_B {} mag\n{} mag from the mean\ndistance modulus {} mag",
                                        one.supernova, one.host, with_error(one.absolute, one.absolute_error),
                                        signed_with_error(one.residual, one.absolute_error),
                                        with_error(one.modulus, one.modulus_error))}});
  }
  json spec = bare_spec(input);
  add_rows(spec, "rows", rows);
  const Range range = range_of(values, errors);
  spec["signals"].push_back({{"name", "room"}, {"update", "width < 320 ? 0 : 120"}});
  spec["scales"].push_back({{"name", "x"},
                            {"type", "linear"},
                            {"zero", false},
                            {"domain", {range.low, range.high}},
                            {"range", {{"signal", "[0, max(60, width - room)]"}}}});
  spec["scales"].push_back(
      {{"name", "y"}, {"type", "point"}, {"range", "height"}, {"domain", order}, {"padding", 0.6}});
  spec["scales"].push_back({{"name", "label"}, {"type", "ordinal"}, {"domain", order}, {"range", labels}});
  spec["axes"] = {{{"scale", "x"},
                   {"orient", "bottom"},
                   {"title", "M_B (mag)"},
                   {"grid", true},
                   {"tickCount", {{"signal", "ceil(max(60, width - room) / 90)"}}}},
                  row_label_axis()};
  for (const json& mark : answer_marks(ladder.m_b)) spec["marks"].push_back(mark);
  const json y = {{"scale", "y"}, {"field", "k"}};
  spec["marks"].push_back({{"type", "rule"},
                           {"from", {{"data", "rows"}}},
                           {"encode",
                            {{"update",
                              {{"x", {{"scale", "x"}, {"signal", "datum.x - datum.e"}}},
                               {"x2", {{"scale", "x"}, {"signal", "datum.x + datum.e"}}},
                               {"y", y},
                               {"stroke", {{"value", "@bar"}}},
                               {"strokeWidth", {{"value", 2}}}}}}}});
  spec["marks"].push_back({{"type", "symbol"},
                           {"from", {{"data", "rows"}}},
                           {"encode",
                            {{"update",
                              {{"x", {{"scale", "x"}, {"field", "x"}}},
                               {"y", y},
                               {"size", {{"value", 60}}},
                               {"fill", {{"value", "@bar"}}}}}}}});
  spec["marks"].push_back(number_mark());
  const std::size_t left_out = ladder.calibrators.size() - order.size();
  return {"calibrators",
          "Calibrators",
          fmt::format("Absolute magnitude that each calibrator alone gives, with the errors of its magnitude and its "
                      "distance; right: its distance from the line, M_B = {} mag, with a band of its whole error.{}",
                      with_error(ladder.m_b.value, ladder.m_b.error),
                      left_out == 0
                          ? ""
                          : fmt::format(" {} left out; calibrators.ecsv says why.",
                                        counted(static_cast<long long>(left_out), "calibrator is", "calibrators are"))),
          "two-thirds",
          90 + 22 * static_cast<int>(order.size()),
          spec,
          {{"header",
            {"supernova", "host", "distance_modulus", "distance_modulus_error", "absolute_magnitude",
             "absolute_magnitude_error", "residual", "used", "why_not"}},
           {"rows", csv}},
          ""};
}

Chart share_chart(const ChartInput& input) {
  std::vector<Bar> bars;
  json csv = json::array();
  for (const auto& [name, share] : ladder_rows(input.run).shares) {
    const std::string percent = fixed(100.0 * share, 1) + " %";
    csv.push_back({name, share});
    bars.push_back({name, percent, fmt::format("{}\n{} of the variance of log H0", name, percent), 100.0 * share});
  }
  const int height = 90 + 30 * static_cast<int>(bars.size());
  return {"h0-shares",
          "Error of H0",
          "Where the variance of log H0 comes from; the four add up to 100 %.",
          "third",
          height,
          bar_spec(input, std::move(bars), "percent of the variance", 60),
          {{"header", {"source", "share"}}, {"rows", csv}},
          ""};
}

}  // namespace

ChartSection ladder_section(const ChartInput& input) {
  ChartSection section{"ladder",
                       "The join to H0",
                       "Do the calibrators agree with each other, and which side of the ladder limits H0?",
                       {}};
  if (!has_ladder(input.run)) return section;
  section.charts.push_back(calibrator_chart(input));
  section.charts.push_back(share_chart(input));
  return section;
}

}  // namespace thirdrung
