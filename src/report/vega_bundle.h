#pragma once

#include <filesystem>
#include <string>

namespace thirdrung {

/// Folder where Debian's package libjs-vega puts its scripts.
inline const char* const debian_vega_folder = "/usr/share/javascript/vega";

/// One script that defines `vega` from the separate modules of Vega that Debian ships.
///
/// Debian's libjs-vega has no single bundle: each module is a file written for a module loader. They are joined here,
/// in the order of their needs, each in a function of its own with a small loader around it; only the modules that the
/// page's charts use are taken (no maps, trees, forces, word clouds), about 460 kB. Expressions are evaluated by
/// vega-interpreter, which never makes code from text, so that the page can forbid that to everyone.
///
/// The licence that Debian's package records goes into a comment in front, since a page passed on passes Vega on too.
/// Throws InputError naming the Debian package if a module is absent.
std::string vega_bundle(const std::filesystem::path& folder = debian_vega_folder);

}  // namespace thirdrung
