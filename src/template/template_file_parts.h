#pragma once

#include <cstdint>

namespace thirdrung::template_parts {

// Names of the parts (EXTNAME) and keywords of a template file, shared by its reader and its writer.

inline constexpr const char* content = "SN Ia spectral template";  ///< Value of the keyword CONTENT.
inline constexpr std::int64_t layout = 1;                          ///< Value of the keyword LAYOUT.

inline constexpr const char* phi = "PHI";
inline constexpr const char* phi_phase = "PHI_PHASE";
inline constexpr const char* phi_wavelength = "PHI_WAVELENGTH";
inline constexpr const char* gamma = "GAMMA";
inline constexpr const char* gamma_phase = "GAMMA_PHASE";
inline constexpr const char* gamma_wavelength = "GAMMA_WAVELENGTH";
inline constexpr const char* colour = "COLOUR";
inline constexpr const char* colour_wavelength = "COLOUR_WAVELENGTH";
inline constexpr const char* gauge = "GAUGE";
inline constexpr const char* epoch_scatter = "EPOCH_SCATTER";
inline constexpr const char* epoch_scatter_phase = "EPOCH_SCATTER_PHASE";
inline constexpr const char* epoch_scatter_wavelength = "EPOCH_SCATTER_WAVELENGTH";
inline constexpr const char* colour_scatter = "COLOUR_SCATTER";
inline constexpr const char* colour_scatter_wavelength = "COLOUR_SCATTER_WAVELENGTH";
inline constexpr const char* modes = "COVARIANCE_MODES";
inline constexpr const char* response_passbands = "RESPONSE_PASSBANDS";
inline constexpr const char* response_zero_point = "RESPONSE_ZERO_POINT";
inline constexpr const char* response_wavelength = "RESPONSE_WAVELENGTH";

}  // namespace thirdrung::template_parts
