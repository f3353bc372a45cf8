#include "report/vega_bundle.h"

#include "base/error.h"
#include "base/text.h"

namespace thirdrung {
namespace {

/// In the order of their needs.
const char* const modules[] = {"vega-util",       "vega-time",       "vega-format",          "vega-loader",
                               "vega-dataflow",   "vega-statistics", "vega-scale",           "vega-canvas",
                               "vega-scenegraph", "vega-selection",  "vega-expression",      "vega-functions",
                               "vega-runtime",    "vega-view",       "vega-event-selector",  "vega-parser",
                               "vega-encode",     "vega-transforms", "vega-view-transforms", "vega-interpreter"};

// The loader. Debian's file is called vega-selection, the module that others ask for vega-selections.
const char* const before =
    "const vega = (() => {\n"
    "const loaded = {};\n"
    "const need = (name) => loaded[name === 'vega-selections' ? 'vega-selection' : name];\n";

const char* const after =
    "Object.assign(loaded['vega-dataflow'].transforms, loaded['vega-transforms'], loaded['vega-view-transforms'],\n"
    "              loaded['vega-encode']);\n"
    "return {parse: loaded['vega-parser'].parse, View: loaded['vega-view'].View,\n"
    "        expressionInterpreter: loaded['vega-interpreter'].expressionInterpreter};\n"
    "})();\n";

void erase_from(std::string& text, const std::string& mark) {
  if (const auto at = text.rfind(mark); at != std::string::npos) text.erase(at);
}

void replace_all(std::string& text, const std::string& old, const std::string& fresh) {
  for (auto at = text.find(old); at != std::string::npos; at = text.find(old, at + fresh.size()))
    text.replace(at, old.size(), fresh);
}

std::string licence() {
  const std::filesystem::path file = "/usr/share/doc/libjs-vega/copyright";
  std::string text =
      std::filesystem::exists(file) ? read_file(file) : "Vega, BSD 3-clause licence, https://vega.github.io";
  replace_all(text, "*/", "* /");
  return "/*\n" + text + "*/\n";
}

}  // namespace

std::string vega_bundle(const std::filesystem::path& folder) {
  std::string bundle = licence() + before;
  for (const std::string module : modules) {
    const std::filesystem::path file = folder / (module + ".min.js");
    if (!std::filesystem::exists(file)) {
      throw InputError(
          {file.string(), std::nullopt, ""}, "is absent, and the page's charts need it",
          "install Debian's package libjs-vega (apt install libjs-vega) or name the folder that holds its scripts");
    }
    std::string text = read_file(file);
    erase_from(text, "//# sourceMappingURL");
    bundle += "(() => {\nconst module = {exports: {}};\n((exports, module, require, define) => {\n";
    bundle += text;
    bundle += "\n}).call(globalThis, module.exports, module, need);\nloaded['";
    bundle += module;
    bundle += "'] = module.exports;\n})();\n";
  }
  bundle += after;
  // Inside an HTML script element this would end it.
  replace_all(bundle, "</script", "<\\/script");
  return bundle;
}

}  // namespace thirdrung
