// Everything of the core floor.
#pragma once

#include "tauwright/core/error.hpp"
#include "tauwright/core/error_code.hpp"
#include "tauwright/core/exponential.hpp"
#include "tauwright/core/finite.hpp"
#include "tauwright/core/range.hpp"
#include "tauwright/core/version.hpp"
