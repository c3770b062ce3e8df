// Everything of the assess floor.
#pragma once

#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
