#include "base/parallel.h"

#include <tbb/blocked_range.h>
#include <tbb/info.h>
#include <tbb/parallel_for.h>
#include <tbb/task_arena.h>

#include <atomic>
#include <csignal>
#include <exception>
#include <mutex>

#include "base/error.h"

namespace thirdrung {

namespace {

std::atomic<bool> stop_flag{false};
static_assert(std::atomic<bool>::is_always_lock_free, "a signal handler may only touch lock-free atomics");

void on_signal(int) {
  stop_flag.store(true);
}

}  // namespace

int thread_count(int threads) {
  return threads > 0 ? threads : tbb::info::default_concurrency();
}

void catch_stop_signals() {
  std::signal(SIGINT, on_signal);
  std::signal(SIGTERM, on_signal);
}

bool stop_requested() {
  return stop_flag.load();
}

void parallel_for(std::size_t count, int threads, const std::function<void(std::size_t)>& body) {
  std::mutex guard;
  std::exception_ptr first_error;
  std::size_t first_index = count;
  std::atomic<bool> interrupted{false};
  const auto guarded = [&](std::size_t i) {
    if (stop_requested()) {
      interrupted.store(true);
      return;
    }
    try {
      body(i);
    } catch (...) {
      const std::lock_guard lock(guard);
      if (i < first_index) {
        first_index = i;
        first_error = std::current_exception();
      }
    }
  };
  const int n = thread_count(threads);
  if (n == 1) {
    for (std::size_t i = 0; i < count; ++i) guarded(i);
  } else {
    tbb::task_arena arena(n);
    arena.execute([&] {
      tbb::parallel_for(tbb::blocked_range<std::size_t>(0, count, 1), [&](const tbb::blocked_range<std::size_t>& r) {
        for (std::size_t i = r.begin(); i != r.end(); ++i) guarded(i);
      });
    });
  }
  if (first_error) std::rethrow_exception(first_error);
  if (interrupted.load()) throw Interrupted("stopped on request");
}

}  // namespace thirdrung
