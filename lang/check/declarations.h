#pragma once
/// \file The names of all files, and the values of parameters.

#include <string>
#include <string_view>

#include "lang/check/check.h"

namespace tarn {

/// Names resolved and parameters evaluated; laws and parts are not yet checked. Reports names
/// that are predefined or declared twice, and parameters that are no constants.
Program declare_program(Modules modules, Diagnostics& diagnostics);

/// Text with runs of blanks and line ends as one space.
std::string one_line(std::string_view text);

}  // namespace tarn
