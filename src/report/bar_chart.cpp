#include "report/bar_chart.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "report/digits.h"
#include "report/spec_parts.h"

namespace thirdrung {

using nlohmann::json;

json row_label_axis() {
  return {{"scale", "y"},
          {"orient", "left"},
          {"ticks", false},
          {"domain", false},
          {"labelLimit", 230},
          {"labelPadding", 8},
          {"encode", {{"labels", {{"update", {{"text", {{"signal", "scale('label', datum.value)"}}}}}}}}}};
}

json bar_spec(const ChartInput& input, std::vector<Bar> bars, const std::string& title, int room) {
  std::stable_sort(bars.begin(), bars.end(),
                   [](const Bar& a, const Bar& b) { return std::abs(a.value) > std::abs(b.value); });
  json rows = json::array(), order = json::array(), labels = json::array();
  double low = 0, high = 0;
  for (std::size_t k = 0; k < bars.size(); ++k) {
    order.push_back(k);
    labels.push_back(bars[k].label);
    rows.push_back({{"k", k},
                    {"v", rounded(bars[k].value, 6)},
                    {"text", bars[k].text},
                    {"tip", bars[k].tip},
                    {"statistical", bars[k].statistical}});
    low = std::min(low, bars[k].value);
    high = std::max(high, bars[k].value);
  }
  json spec = bare_spec(input);
  add_rows(spec, "rows", rows);
  spec["scales"].push_back({{"name", "x"},
                            {"type", "linear"},
                            {"domain", {1.04 * low, 1.04 * high}},
                            {"range", {{"signal", fmt::format("[0, max(60, width - {})]", room)}}}});
  spec["scales"].push_back(
      {{"name", "y"}, {"type", "band"}, {"range", "height"}, {"domain", order}, {"padding", 0.28}});
  spec["scales"].push_back({{"name", "label"}, {"type", "ordinal"}, {"domain", order}, {"range", labels}});
  spec["axes"] = {{{"scale", "x"},
                   {"orient", "bottom"},
                   {"title", title},
                   {"grid", true},
                   {"tickCount", {{"signal", fmt::format("ceil(max(60, width - {}) / 90)", room)}}}},
                  row_label_axis()};
  spec["marks"] = {{{"type", "rect"},
                    {"from", {{"data", "rows"}}},
                    {"encode",
                     {{"update",
                       {{"x", {{"scale", "x"}, {"value", 0}}},
                        {"x2", {{"scale", "x"}, {"field", "v"}}},
                        {"y", {{"scale", "y"}, {"field", "k"}}},
                        {"height", {{"scale", "y"}, {"band", 1}}},
                        {"fill", {{"signal", "datum.statistical ? '@c1' : '@bar'"}}}}}}}},
                   {{"type", "text"},
                    {"interactive", false},
                    {"from", {{"data", "rows"}}},
                    {"encode",
                     {{"update",
                       {{"x", {{"signal", "width"}}},
                        {"y", {{"scale", "y"}, {"field", "k"}, {"band", 0.5}}},
                        {"align", {{"value", "right"}}},
                        {"baseline", {{"value", "middle"}}},
                        {"fontSize", {{"value", 11}}},
                        {"fill", {{"value", "@ink"}}},
                        {"text", {{"field", "text"}}}}}}}}};
  return spec;
}

}  // namespace thirdrung
