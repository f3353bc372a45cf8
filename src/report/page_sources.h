#pragma once

#include <string_view>

namespace thirdrung {

/// The page's own HTML skeleton, style and script, from src/report/page/, put into the program when it is built.
struct PageSources {
  std::string_view html;  ///< With the marks {{title}}, {{nonce}}, {{css}}, {{vega}}, {{data}}, {{script}}.
  std::string_view css;
  std::string_view js;  ///< The files of src/report/page/*.js one after the other.
};
PageSources page_sources();

}  // namespace thirdrung
