#pragma once

#include <chrono>
#include <cstddef>
#include <mutex>
#include <string>

namespace thirdrung {

/// A line on the terminal that shows how far a long step has come and how long it will still take.
///
/// Writes to standard error, only if that is a terminal; silent in a pipe. Safe to call from several threads.
class Progress {
 public:
  Progress(std::string what, std::size_t total);
  ~Progress();
  Progress(const Progress&) = delete;
  Progress& operator=(const Progress&) = delete;

  void advance(std::size_t steps = 1);

 private:
  void draw();

  std::string what_;
  std::size_t total_;
  std::size_t done_ = 0;
  bool visible_;
  std::mutex guard_;
  std::chrono::steady_clock::time_point start_;
  std::chrono::steady_clock::time_point last_drawn_;
};

}  // namespace thirdrung
