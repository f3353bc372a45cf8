#pragma once

#include "pipeline/run_file.h"
#include "tables/table.h"

namespace thirdrung {

/// H0 from the table "intercept" and the absolute magnitude of the run file: quantity, value, error, unit, meaning.
Table join_of(const RunFile& run, const Table& intercept);

}  // namespace thirdrung
