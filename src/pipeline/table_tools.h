#pragma once

#include <span>
#include <string>
#include <vector>

#include "sample/supernova.h"
#include "tables/table.h"

namespace thirdrung {

/// Rows of all tables under each other; the columns are those of the first, which all must have with the same type.
Table stacked(std::span<const Table> tables);

/// The rows of a table for which `keep` is true.
Table rows_of(const Table& table, const std::vector<bool>& keep);

/// Columns supernova, survey, reason.
Table set_aside_table(std::span<const SetAside> set_aside);

/// "a, b" taken apart at the separator; empty pieces left out.
std::vector<std::string> split_list(const std::string& text, const std::string& separator);
std::string joined_list(std::span<const std::string> words, const std::string& separator);

}  // namespace thirdrung
