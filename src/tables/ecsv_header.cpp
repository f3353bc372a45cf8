#include "tables/ecsv_header.h"

#include <fmt/format.h>
#include <yaml-cpp/yaml.h>

#include <algorithm>
#include <array>
#include <limits>
#include <set>

#include "base/error.h"
#include "tables/cells.h"

namespace thirdrung {

namespace {

constexpr std::string_view kMark = "# %ECSV ";

[[noreturn]] void fail(const std::string& file, const std::string& fault, const std::string& remedy) {
  throw InputError({file, {}, {}}, fault, remedy);
}

struct Datatype {
  std::string_view name;
  EcsvColumn::Kind kind;
  std::int64_t smallest;
  std::int64_t largest;
};

using Kind = EcsvColumn::Kind;
constexpr std::int64_t kMost = std::numeric_limits<std::int64_t>::max();
constexpr std::array<Datatype, 14> kDatatypes = {{
    {"bool", Kind::flag, 0, 0},
    {"int8", Kind::integer, -128, 127},
    {"int16", Kind::integer, -32768, 32767},
    {"int32", Kind::integer, -2147483648LL, 2147483647},
    {"int64", Kind::integer, std::numeric_limits<std::int64_t>::min(), kMost},
    {"uint8", Kind::integer, 0, 255},
    {"uint16", Kind::integer, 0, 65535},
    {"uint32", Kind::integer, 0, 4294967295LL},
    {"uint64", Kind::integer, 0, kMost},  // larger values do not fit and are refused row by row
    {"float16", Kind::half, 0, 0},
    {"float32", Kind::single, 0, 0},
    {"float64", Kind::real, 0, 0},
    {"float128", Kind::real, 0, 0},
    {"string", Kind::text, 0, 0},
}};

/// The YAML document: every line from the second on, without its "# ". Advances header.length and .lines.
std::string yaml_text(std::string_view text, EcsvHeader& header) {
  std::string yaml;
  std::size_t at = 0;
  while (at < text.size()) {
    const std::size_t end = std::min(text.find('\n', at), text.size());
    std::string_view line = text.substr(at, end - at);
    if (!line.empty() && line.back() == '\r') line.remove_suffix(1);
    if (!line.starts_with('#') && !trimmed(line).empty()) break;
    if (header.lines > 0 && !line.empty()) {
      line.remove_prefix(1);
      if (line.starts_with(' ')) line.remove_prefix(1);
      yaml += line;
    }
    if (header.lines > 0) yaml += '\n';
    ++header.lines;
    at = std::min(end + 1, text.size());
  }
  header.length = at;
  return yaml;
}

std::string scalar(const YAML::Node& node) {
  return node && node.IsScalar() ? node.Scalar() : std::string();
}

/// Units are plain text, or (from astropy's own mixin columns) a map with the text under "unit".
std::string unit_of(const YAML::Node& node) {
  return node && node.IsMap() ? scalar(node["unit"]) : scalar(node);
}

EcsvColumn column_of(const YAML::Node& node, const std::string& file, std::size_t number) {
  EcsvColumn column;
  if (!node.IsMap() || !node["name"] || !node["name"].IsScalar()) {
    fail(file, fmt::format("entry {} of \"datatype\" in the header has no name", number),
         "give it as {name: ..., datatype: ...}");
  }
  column.name = node["name"].Scalar();
  if (column.name.empty() || has_control_character(column.name)) {
    fail(file, fmt::format("the name in entry {} of \"datatype\" is empty or holds a line break", number),
         "give it a name on one line");
  }
  column.datatype = scalar(node["datatype"]);
  column.unit = unit_of(node["unit"]);
  column.description = scalar(node["description"]);
  const std::string subtype = scalar(node["subtype"]);
  if (subtype.find('[') != std::string::npos || subtype == "json") {
    throw InputError({file, {}, column.name}, fmt::format("holds arrays or objects (subtype {})", subtype),
                     "give one number or text a cell, in several columns or rows if need be");
  }
  const auto* type =
      std::find_if(kDatatypes.begin(), kDatatypes.end(), [&](const Datatype& d) { return d.name == column.datatype; });
  if (type == kDatatypes.end()) {
    throw InputError({file, {}, column.name}, fmt::format("its datatype \"{}\" is not read here", column.datatype),
                     "use float64, int64, bool or string");
  }
  column.kind = type->kind;
  column.smallest = type->smallest;
  column.largest = type->largest;
  return column;
}

std::string meta_text(const YAML::Node& node) {
  if (node.IsNull()) return "";
  if (node.IsScalar()) return node.Scalar();
  YAML::Emitter emitter;
  emitter.SetSeqFormat(YAML::Flow);
  emitter.SetMapFormat(YAML::Flow);
  emitter << node;
  return emitter.c_str();
}

/// Astropy's notes on how it took its own objects apart. The columns stand for themselves here, but for masks that
/// were put into columns of their own: passing over those would take missing values for real ones.
void check_serialized(const YAML::Node& node, const std::string& file) {
  if (!node.IsMap()) return;
  for (const auto& entry : node) {
    if (entry.second.IsMap() && entry.second["mask"]) {
      throw InputError({file, {}, scalar(entry.first)}, "its missing values are marked by a mask in another column",
                       "write the table with empty fields for missing values");
    }
  }
}

/// "meta" is a map, or the ordered form of one: a list of maps with one key each.
void read_meta(const YAML::Node& node, const std::string& file, EcsvHeader& header) {
  const auto add = [&](const YAML::Node& map) {
    for (const auto& entry : map) {
      if (scalar(entry.first) == "__serialized_columns__") {
        check_serialized(entry.second, file);
        continue;
      }
      header.meta.emplace_back(scalar(entry.first), meta_text(entry.second));
    }
  };
  if (node.IsMap()) add(node);
  if (!node.IsSequence()) return;
  for (const auto& item : node) {
    if (item.IsMap()) add(item);
  }
}

void read_delimiter(const YAML::Node& node, const std::string& file, EcsvHeader& header) {
  if (!node) return;
  const std::string delimiter = scalar(node);
  if (delimiter != "," && delimiter != " ") {
    fail(file, fmt::format("its delimiter {} is neither a comma nor a blank", quoted_for_message(delimiter)),
         "use ','");
  }
  header.delimiter = delimiter[0];
}

YAML::Node parse_yaml(const std::string& yaml, const std::string& file) {
  try {
    return YAML::Load(yaml);
  } catch (const YAML::Exception& error) {
    fail(file, fmt::format("line {}: the header is not valid YAML ({})", error.mark.line + 2, error.msg),
         "mend it, or have astropy write the file");
  }
}

}  // namespace

bool looks_like_ecsv(std::string_view text) {
  return text.starts_with(kMark);
}

EcsvHeader parse_ecsv_header(std::string_view text, const std::string& file) {
  if (!looks_like_ecsv(text)) {
    fail(file, "the first line is not \"# %ECSV 1.0\"", "give an ECSV file, or name a plain table .csv");
  }
  if (!text.substr(kMark.size()).starts_with("1.") && !text.substr(kMark.size()).starts_with("0.9")) {
    fail(file, "is of a version of ECSV that is not read here", "write it as ECSV 1.0");
  }
  EcsvHeader header;
  const YAML::Node root = parse_yaml(yaml_text(text, header), file);
  if (!root.IsMap() || !root["datatype"] || !root["datatype"].IsSequence() || root["datatype"].size() == 0) {
    fail(file, "the header has no list \"datatype\"", "list every column there with name and datatype");
  }
  std::set<std::string> names;
  for (const auto& node : root["datatype"]) {
    header.columns.push_back(column_of(node, file, header.columns.size() + 1));
    if (!names.insert(header.columns.back().name).second) {
      fail(file, fmt::format("two columns are named \"{}\"", header.columns.back().name), "rename one");
    }
  }
  read_delimiter(root["delimiter"], file, header);
  if (root["meta"]) read_meta(root["meta"], file, header);
  return header;
}

}  // namespace thirdrung
