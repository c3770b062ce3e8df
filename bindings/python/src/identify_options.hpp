// Options of a fit from Python dictionaries, used by identify and by tune.
#pragma once

#include "bind.hpp"

namespace binding {

/// From None or a dictionary with the keys gain, slope, lag_1, dead_time, offset.
tw::FixedParameters fixed_from(const py::object& fixed);
/// From None or a dictionary with the keys form, drift, fixed.
tw::IdentifyOptions identify_options_from(const py::object& options);

}  // namespace binding
