#pragma once

#include <cstddef>
#include <optional>
#include <stdexcept>
#include <string>

namespace thirdrung {

/// Where in the user's input something is wrong. Empty members are left out of the message.
struct Place {
  std::string file;
  std::optional<std::size_t> row;  ///< 1 for the first data row of a table, or the line of a run file.
  std::string column;              ///< Name of the column, or of the run-file key.
};

/// Exit codes of the program; documented in docs/commands.md.
enum class ExitCode : int {
  success = 0,
  usage = 2,         ///< The command line itself is wrong.
  input = 3,         ///< A file the user gave is missing, malformed or contradictory.
  output = 4,        ///< A result could not be written.
  no_result = 5,     ///< Inputs are sound, but too little is left to answer.
  interrupted = 130  ///< Stopped by the user; the finished part is kept.
};

/// Something in the user's input is wrong. The message is one sentence: place, fault, remedy.
class InputError : public std::runtime_error {
 public:
  /// @param fault what is wrong, without the place ("negative flux_error -3.2").
  /// @param remedy what to do about it ("give a positive error or leave the row out").
  InputError(Place place, const std::string& fault, const std::string& remedy);

  const Place& place() const { return place_; }

 private:
  Place place_;
};

/// A result could not be written (full disk, no permission).
class OutputError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// The inputs are sound but do not determine an answer (sample too small after cuts, no band covered).
class NoResultError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

/// The user asked to stop (Ctrl-C); what is finished has been saved.
class Interrupted : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

}  // namespace thirdrung
