#pragma once

#include <filesystem>
#include <functional>
#include <string_view>

namespace thirdrung {

/// Replaces `path` by `content` so that any reader, or a killed run, sees the old file or the new one.
///
/// Written beside the target, flushed to disk and renamed over it. Throws OutputError (naming the file
/// and the system's reason) and removes the unfinished file if anything fails.
void write_file_atomically(const std::filesystem::path& path, std::string_view content);

/// As above for libraries that want a path: `writer` gets the temporary path, which is then renamed.
/// The temporary name keeps the target's ending (.fits, .fits.gz).
void write_atomically(const std::filesystem::path& path,
                      const std::function<void(const std::filesystem::path&)>& writer);

/// Removes from a folder the unfinished files of programs that were killed while writing; those of running ones stay.
void remove_unfinished(const std::filesystem::path& folder);

}  // namespace thirdrung
