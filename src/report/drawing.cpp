#include "report/drawing.h"

#include <cairo-pdf.h>
#include <cairo-svg.h>
#include <fmt/format.h>

#include <cmath>

#include "base/error.h"
#include "report/digits.h"

namespace thirdrung {
namespace {

void path_of_symbol(cairo_t* pen, std::size_t k, double x, double y, double r) {
  switch (k % 4) {
    case 0:
      cairo_new_sub_path(pen);
      cairo_arc(pen, x, y, r, 0, 2 * 3.14159265358979);
      break;
    case 1:
      cairo_rectangle(pen, x - 0.9 * r, y - 0.9 * r, 1.8 * r, 1.8 * r);
      break;
    case 2:
      cairo_move_to(pen, x, y - 1.25 * r);
      cairo_line_to(pen, x + 1.15 * r, y + 0.85 * r);
      cairo_line_to(pen, x - 1.15 * r, y + 0.85 * r);
      cairo_close_path(pen);
      break;
    default:
      cairo_move_to(pen, x, y - 1.3 * r);
      cairo_line_to(pen, x + 1.3 * r, y);
      cairo_line_to(pen, x, y + 1.3 * r);
      cairo_line_to(pen, x - 1.3 * r, y);
      cairo_close_path(pen);
  }
}

/// A fixed date, so that the same tables give the same bytes.
const char* const date_of_file = "2000-01-01T00:00:00Z";

}  // namespace

Colour series_colour(std::size_t k) {
  // The page's colours of surveys, light theme (page.css).
  const Colour colours[] = {{0.204, 0.322, 0.725}, {0.780, 0.427, 0.110}, {0.224, 0.608, 0.549}, {0.333, 0.004, 0.239},
                            {0.643, 0.447, 0.898}, {0.310, 0.263, 0.008}, {0.553, 0.251, 0.416}, {0.188, 0.082, 0.522}};
  return colours[k % 8];
}

Drawing::Drawing(const std::filesystem::path& path, Format format, double width, double height)
    : path_(path), width_(width), height_(height) {
  surface_ = format == Format::pdf ? cairo_pdf_surface_create(path.c_str(), width, height)
                                   : cairo_svg_surface_create(path.c_str(), width, height);
  if (format == Format::pdf) {
    cairo_pdf_surface_set_metadata(surface_, CAIRO_PDF_METADATA_CREATE_DATE, date_of_file);
  } else {
    cairo_svg_surface_set_document_unit(surface_, CAIRO_SVG_UNIT_PT);
  }
  pen_ = cairo_create(surface_);
  cairo_select_font_face(pen_, "DejaVu Sans", CAIRO_FONT_SLANT_NORMAL, CAIRO_FONT_WEIGHT_NORMAL);
  cairo_set_line_join(pen_, CAIRO_LINE_JOIN_ROUND);
}

Drawing::~Drawing() {
  cairo_destroy(pen_);
  cairo_surface_destroy(surface_);
}

void Drawing::finish() {
  cairo_show_page(pen_);
  cairo_surface_finish(surface_);
  cairo_status_t status = cairo_status(pen_);
  if (status == CAIRO_STATUS_SUCCESS) status = cairo_surface_status(surface_);
  if (status != CAIRO_STATUS_SUCCESS)
    throw OutputError(
        fmt::format("{}: the figure cannot be written ({})", path_.string(), cairo_status_to_string(status)));
}

void Drawing::stroke(double thickness, Colour colour, bool dashed) {
  const double dashes[] = {3, 2};
  cairo_set_dash(pen_, dashes, dashed ? 2 : 0, 0);
  cairo_set_line_width(pen_, thickness);
  cairo_set_source_rgb(pen_, colour.red, colour.green, colour.blue);
  cairo_stroke(pen_);
}

void Drawing::line(double x1, double y1, double x2, double y2, double thickness, Colour colour, bool dashed) {
  cairo_move_to(pen_, x1, y1);
  cairo_line_to(pen_, x2, y2);
  stroke(thickness, colour, dashed);
}

void Drawing::polyline(const std::vector<double>& x, const std::vector<double>& y, double thickness, Colour colour,
                       bool dashed) {
  for (std::size_t i = 0; i < x.size(); ++i) cairo_line_to(pen_, x[i], y[i]);
  stroke(thickness, colour, dashed);
}

void Drawing::rectangle(double x, double y, double width, double height, Colour fill, bool filled) {
  cairo_rectangle(pen_, x, y, width, height);
  if (!filled) return stroke(0.6, fill, false);
  cairo_set_source_rgb(pen_, fill.red, fill.green, fill.blue);
  cairo_fill(pen_);
}

void Drawing::symbol(std::size_t k, double x, double y, double radius, Colour colour) {
  path_of_symbol(pen_, k, x, y, radius);
  // Past four shapes the symbols are open.
  const bool open = k % 8 >= 4;
  cairo_set_source_rgb(pen_, open ? 1 : colour.red, open ? 1 : colour.green, open ? 1 : colour.blue);
  cairo_fill_preserve(pen_);
  stroke(open ? 0.8 : 0.3, open ? colour : Colour{1, 1, 1}, false);
}

void Drawing::square(double x, double y, double radius) {
  rectangle(x - radius, y - radius, 2 * radius, 2 * radius, {1, 1, 1});
  cairo_rectangle(pen_, x - radius, y - radius, 2 * radius, 2 * radius);
  stroke(0.9, ink, false);
}

double Drawing::pieces(const std::string& content, double size, bool draw) {
  double advance = 0;
  std::size_t from = 0;
  while (from < content.size()) {
    const bool lowered = content.compare(from, 2, "_{") == 0;
    std::size_t to = lowered ? content.find('}', from) : content.find("_{", from);
    if (to == std::string::npos) to = content.size();
    const std::string piece = lowered ? content.substr(from + 2, to - from - 2) : content.substr(from, to - from);
    cairo_set_font_size(pen_, lowered ? 0.72 * size : size);
    cairo_text_extents_t extents;
    cairo_text_extents(pen_, piece.c_str(), &extents);
    if (draw) {
      cairo_move_to(pen_, advance, lowered ? 0.22 * size : 0);
      cairo_show_text(pen_, piece.c_str());
    }
    advance += extents.x_advance;
    from = lowered ? to + 1 : to;
  }
  return advance;
}

double Drawing::text_width(const std::string& content, double size) {
  return pieces(content, size, false);
}

double Drawing::text(double x, double y, const std::string& content, double size, Align align, Colour colour,
                     double angle) {
  const double width = text_width(content, size);
  cairo_save(pen_);
  cairo_translate(pen_, x, y);
  cairo_rotate(pen_, -angle * 3.14159265358979 / 180);
  cairo_translate(pen_, align == Align::left ? 0 : align == Align::centre ? -width / 2 : -width, 0);
  cairo_set_source_rgb(pen_, colour.red, colour.green, colour.blue);
  pieces(content, size, true);
  cairo_restore(pen_);
  cairo_new_path(pen_);
  return width;
}

void Drawing::begin_clip(double x, double y, double width, double height) {
  cairo_save(pen_);
  cairo_rectangle(pen_, x, y, width, height);
  cairo_clip(pen_);
}

void Drawing::end_clip() {
  cairo_restore(pen_);
}

}  // namespace thirdrung
