#pragma once

#include <Eigen/Core>
#include <filesystem>
#include <optional>
#include <string>

namespace thirdrung {

/// Shifts of moved inputs, each saved in the resume folder as soon as it is found, so that a run that is killed among
/// the systematics goes on there.
///
/// A file carries a checksum of everything its shift depends on: what the stage works with, and the move itself. One
/// that is damaged or belongs to something else counts as absent.
class SavedShifts {
 public:
  /// @param key of what all shifts depend on: inputs, tables, settings, the version of the program.
  SavedShifts(std::filesystem::path folder, std::string key) : folder_(std::move(folder)), key_(std::move(key)) {}

  /// The shift of a move [mag], if it is there with as many supernovae.
  /// @param identity of the move (MovedInput::identity).
  std::optional<Eigen::VectorXd> find(const std::string& identity, Eigen::Index supernovae) const;
  /// Throws OutputError if it cannot be written.
  void save(const std::string& identity, const Eigen::VectorXd& shift) const;

  /// Removes all that a folder holds.
  static void remove_all(const std::filesystem::path& folder);

 private:
  std::string key_of(const std::string& identity) const;
  std::filesystem::path file_of(const std::string& key) const;

  std::filesystem::path folder_;
  std::string key_;
};

}  // namespace thirdrung
