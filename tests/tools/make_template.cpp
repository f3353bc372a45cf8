// Writes the invented template of the tests, brought into its gauge, for end-to-end checks that need a template file.
//   make_template FILE
#include <cstdio>
#include <exception>

#include "template/gauged_template.h"
#include "template/template_file.h"

int main(int argc, char** argv) {
  if (argc != 2) {
    std::fputs("usage: make_template FILE\n", stderr);
    return 2;
  }
  try {
    thirdrung::write_template({thirdrung::testing::gauged_template(), {}, {}}, argv[1]);
  } catch (const std::exception& fault) {
    std::fprintf(stderr, "%s\n", fault.what());
    return 3;
  }
  return 0;
}
