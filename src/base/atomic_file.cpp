#include "base/atomic_file.h"

#include <fcntl.h>
#include <fmt/format.h>
#include <signal.h>
#include <unistd.h>

#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <string>

#include "base/error.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

constexpr std::string_view unfinished = ".unfinished-";

[[noreturn]] void fail(const fs::path& path, const char* reason) {
  throw OutputError(fmt::format("{}: cannot be written: {}.", path.string(), reason));
}

void flush_to_disk(const fs::path& path, const fs::path& target) {
  const int descriptor = ::open(path.c_str(), O_RDONLY | O_CLOEXEC);
  if (descriptor < 0) fail(target, std::strerror(errno));
  const int status = ::fsync(descriptor);
  const int reason = errno;
  ::close(descriptor);
  if (status != 0) fail(target, std::strerror(reason));
}

void write_all(const fs::path& path, const fs::path& target, std::string_view content) {
  const int descriptor = ::open(path.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0644);
  if (descriptor < 0) fail(target, std::strerror(errno));
  while (!content.empty()) {
    const ssize_t written = ::write(descriptor, content.data(), content.size());
    if (written < 0 && errno == EINTR) continue;
    if (written <= 0) {
      const int reason = errno;
      ::close(descriptor);
      fail(target, std::strerror(reason));
    }
    content.remove_prefix(static_cast<std::size_t>(written));
  }
  if (::close(descriptor) != 0) fail(target, std::strerror(errno));
}

}  // namespace

void write_atomically(const fs::path& path, const std::function<void(const fs::path&)>& writer) {
  const fs::path temporary =
      path.parent_path() / fmt::format("{}{}-{}", unfinished, ::getpid(), path.filename().string());
  std::error_code ignored;
  try {
    writer(temporary);
    flush_to_disk(temporary, path);
    std::error_code error;
    fs::rename(temporary, path, error);
    if (error) fail(path, error.message().c_str());
  } catch (...) {
    fs::remove(temporary, ignored);
    throw;
  }
}

void remove_unfinished(const fs::path& folder) {
  std::error_code ignored;
  for (const auto& entry : fs::directory_iterator(folder, ignored)) {
    const std::string name = entry.path().filename().string();
    if (!name.starts_with(unfinished)) continue;
    const long writer = std::strtol(name.c_str() + unfinished.size(), nullptr, 10);
    if (writer > 0 && ::kill(static_cast<pid_t>(writer), 0) != 0 && errno == ESRCH) fs::remove(entry.path(), ignored);
  }
}

void write_file_atomically(const fs::path& path, std::string_view content) {
  write_atomically(path, [&](const fs::path& temporary) { write_all(temporary, path, content); });
}

}  // namespace thirdrung
