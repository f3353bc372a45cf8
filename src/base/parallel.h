#pragma once

#include <cstddef>
#include <functional>

namespace thirdrung {

/// Runs body(i) for i in [0, count), on up to `threads` threads (0: all cores).
///
/// Each index is run exactly once and writes only to its own place, so the result does not depend on
/// the number of threads; sums over indices are the caller's, in index order. If a body throws, the
/// exception of the lowest index is rethrown after all running bodies have returned. Stops between
/// indices with Interrupted once stop_requested() is true.
void parallel_for(std::size_t count, int threads, const std::function<void(std::size_t)>& body);

/// Number of threads that `threads` stands for (0: all cores).
int thread_count(int threads);

/// Makes SIGINT and SIGTERM set a flag instead of ending the program; called once by the commands.
void catch_stop_signals();
/// True once a caught signal asked the program to stop.
bool stop_requested();

}  // namespace thirdrung
