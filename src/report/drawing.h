#pragma once

#include <cairo.h>

#include <filesystem>
#include <string>
#include <vector>

#include "report/spec_parts.h"

namespace thirdrung {

struct Colour {
  double red = 0, green = 0, blue = 0;
};
inline constexpr Colour ink{0.08, 0.09, 0.11}, grey{0.45, 0.46, 0.48}, pale{0.82, 0.82, 0.80};
/// Colour of the k-th survey: dark and light by turns.
Colour series_colour(std::size_t k);

enum class Align { left, centre, right };

/// A page of vector graphics in points (1/72 inch), y downwards.
class Drawing {
 public:
  enum class Format { svg, pdf };
  /// Throws OutputError if the file cannot be made.
  Drawing(const std::filesystem::path& path, Format format, double width, double height);
  ~Drawing();
  Drawing(const Drawing&) = delete;
  Drawing& operator=(const Drawing&) = delete;

  void line(double x1, double y1, double x2, double y2, double thickness, Colour colour, bool dashed = false);
  void polyline(const std::vector<double>& x, const std::vector<double>& y, double thickness, Colour colour,
                bool dashed = false);
  void rectangle(double x, double y, double width, double height, Colour fill, bool filled = true);
  /// The k-th survey's symbol about a place; `radius` in points.
  void symbol(std::size_t k, double x, double y, double radius, Colour colour);
  /// Open square, for means.
  void square(double x, double y, double radius);
  /// Text whose "_{...}" is set lower and smaller. `angle` in degrees, anticlockwise. Returns its width.
  double text(double x, double y, const std::string& content, double size, Align align = Align::left,
              Colour colour = ink, double angle = 0);
  double text_width(const std::string& content, double size);
  /// Everything between begin and end stays inside the rectangle.
  void begin_clip(double x, double y, double width, double height);
  void end_clip();
  /// Closes the file. Throws OutputError if it could not be written.
  void finish();

  double width() const { return width_; }
  double height() const { return height_; }

 private:
  void stroke(double thickness, Colour colour, bool dashed);
  double pieces(const std::string& content, double size, bool draw);

  std::filesystem::path path_;
  double width_, height_;
  cairo_surface_t* surface_;
  cairo_t* pen_;
};

/// A framed plot with ticks and titles.
class PlotArea {
 public:
  PlotArea(double x, double y, double width, double height, const Direction& across, const Direction& up)
      : x_(x), y_(y), width_(width), height_(height), across_(across), up_(up) {}

  double x(double value) const;
  double y(double value) const;
  /// Frame, ticks, numbers, titles; numbers and title of the x axis only where `with_x`, titles of y only where
  /// `with_y`.
  void frame(Drawing& drawing, bool with_x = true, bool with_y = true) const;
  void begin_clip(Drawing& drawing) const { drawing.begin_clip(x_, y_, width_, height_); }
  void vertical_error(Drawing& drawing, double x, double y, double error, double thickness, Colour colour) const;
  void level(Drawing& drawing, double value) const;

 private:
  double x_, y_, width_, height_;
  Direction across_, up_;
};

/// Round steps from low to high, about `count` of them.
std::vector<double> round_ticks(Range range, int count);

}  // namespace thirdrung
