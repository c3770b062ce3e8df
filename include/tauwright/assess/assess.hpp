// Everything of the assess floor.
#pragma once

#include "tauwright/assess/continuous_trend.hpp"
#include "tauwright/assess/delay_budget.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/assess/simulate.hpp"
#include "tauwright/assess/simulate_many.hpp"
#include "tauwright/assess/uncertainty.hpp"
#include "tauwright/assess/valve_cycle.hpp"
#include "tauwright/assess/worst_case.hpp"
