#include "base/error.h"

#include <fmt/format.h>

namespace thirdrung {

namespace {

std::string sentence(const Place& place, const std::string& fault, const std::string& remedy) {
  std::string where = place.file;
  const auto add = [&where](const std::string& part) {
    if (!where.empty()) where += ", ";
    where += part;
  };
  if (place.row) add(fmt::format("row {}", *place.row));
  if (!place.column.empty()) add(fmt::format("column {}", place.column));
  std::string text = where.empty() ? fault : where + ": " + fault;
  if (!remedy.empty()) text += "; " + remedy;
  if (!text.empty() && text.back() != '.' && text.back() != '?') text += '.';
  return text;
}

}  // namespace

InputError::InputError(Place place, const std::string& fault, const std::string& remedy)
    : std::runtime_error(sentence(place, fault, remedy)), place_(std::move(place)) {}

}  // namespace thirdrung
