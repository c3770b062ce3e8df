// All of tauwright. Links against tauwright::tauwright; the floors' own headers are lighter.
#pragma once

#include "tauwright/assess/assess.hpp"
#include "tauwright/control/control.hpp"
#include "tauwright/core/core.hpp"
#include "tauwright/discretize/discretize.hpp"
#include "tauwright/identify/identify.hpp"
#include "tauwright/model/model.hpp"
#include "tauwright/run/run.hpp"
#include "tauwright/synthesize/synthesize.hpp"
#include "tauwright/tune/tune.hpp"
