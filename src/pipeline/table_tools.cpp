#include "pipeline/table_tools.h"

#include <algorithm>
#include <stdexcept>
#include <variant>

namespace thirdrung {

namespace {

void append(Column& to, const Column& from) {
  if (to.name != from.name || to.values.index() != from.values.index())
    throw std::logic_error("tables with other columns cannot be stacked: " + to.name + ", " + from.name);
  if (!from.missing.empty() && to.missing.empty()) to.missing.assign(to.size(), false);
  if (!to.missing.empty()) {
    for (std::size_t i = 0; i < from.size(); ++i) to.missing.push_back(from.is_missing(i));
  }
  std::visit(
      [&](auto& values) {
        const auto& more = std::get<std::decay_t<decltype(values)>>(from.values);
        values.insert(values.end(), more.begin(), more.end());
      },
      to.values);
}

}  // namespace

Table stacked(std::span<const Table> tables) {
  if (tables.empty()) return {};
  // Tables without a single row lose the types of their columns in some containers: they add nothing anyway.
  std::vector<const Table*> filled;
  for (const Table& table : tables) {
    if (table.rows() > 0) filled.push_back(&table);
  }
  if (filled.empty()) return tables.front();
  std::vector<Column> columns = filled.front()->columns();
  for (std::size_t k = 1; k < filled.size(); ++k) {
    if (filled[k]->columns().size() != columns.size()) throw std::logic_error("tables of unequal columns");
    for (std::size_t c = 0; c < columns.size(); ++c) append(columns[c], filled[k]->columns()[c]);
  }
  Table out(filled.front()->origin());
  for (Column& column : columns) out.add(std::move(column));
  return out;
}

Table rows_of(const Table& table, const std::vector<bool>& keep) {
  Table out(table.origin());
  for (const Column& column : table.columns()) {
    Column kept{column.name, column.unit, column.description, {}, {}};
    std::visit(
        [&](const auto& values) {
          std::decay_t<decltype(values)> some;
          for (std::size_t i = 0; i < values.size(); ++i) {
            if (keep[i]) some.push_back(values[i]);
          }
          kept.values = std::move(some);
        },
        column.values);
    for (std::size_t i = 0; i < column.missing.size(); ++i) {
      if (keep[i]) kept.missing.push_back(column.missing[i]);
    }
    out.add(std::move(kept));
  }
  return out;
}

Table set_aside_table(std::span<const SetAside> set_aside) {
  std::vector<std::string> supernova, survey, reason;
  for (const SetAside& one : set_aside) {
    supernova.push_back(one.supernova);
    survey.push_back(one.survey);
    reason.push_back(one.reason);
  }
  Table table;
  table.add_strings("supernova", std::move(supernova));
  table.add_strings("survey", std::move(survey));
  table.add_strings("reason", std::move(reason), "why it could not be used");
  return table;
}

std::vector<std::string> split_list(const std::string& text, const std::string& separator) {
  std::vector<std::string> out;
  for (std::size_t start = 0; start < text.size();) {
    const std::size_t end = std::min(text.find(separator, start), text.size());
    if (end > start) out.push_back(text.substr(start, end - start));
    start = end + separator.size();
  }
  return out;
}

std::string joined_list(std::span<const std::string> words, const std::string& separator) {
  std::string out;
  for (const std::string& word : words) out += (out.empty() ? "" : separator) + word;
  return out;
}

}  // namespace thirdrung
