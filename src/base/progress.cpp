#include "base/progress.h"

#include <fmt/format.h>
#include <unistd.h>

#include <cstdio>

namespace thirdrung {

Progress::Progress(std::string what, std::size_t total)
    : what_(std::move(what)),
      total_(total),
      visible_(isatty(STDERR_FILENO) == 1),
      start_(std::chrono::steady_clock::now()),
      last_drawn_(start_) {}

Progress::~Progress() {
  if (visible_) fmt::print(stderr, "\r\033[K");
}

void Progress::advance(std::size_t steps) {
  if (!visible_) return;
  const std::lock_guard lock(guard_);
  done_ += steps;
  const auto now = std::chrono::steady_clock::now();
  if (now - last_drawn_ < std::chrono::milliseconds(100) && done_ < total_) return;
  last_drawn_ = now;
  draw();
}

void Progress::draw() {
  constexpr std::size_t width = 30;
  const double fraction = total_ > 0 ? static_cast<double>(done_) / static_cast<double>(total_) : 1.0;
  const auto filled = static_cast<std::size_t>(fraction * static_cast<double>(width));
  const double elapsed = std::chrono::duration<double>(last_drawn_ - start_).count();
  const double left = fraction > 0 ? elapsed * (1.0 - fraction) / fraction : 0.0;
  fmt::print(stderr, "\r\033[K{} [{}{}] {}/{}, {:.0f} s left", what_, std::string(filled, '='),
             std::string(width - filled, ' '), done_, total_, left);
  std::fflush(stderr);
}

}  // namespace thirdrung
