// Everything of the discretize floor.
#pragma once

#include "tauwright/discretize/held.hpp"
#include "tauwright/discretize/pid.hpp"
#include "tauwright/discretize/process.hpp"
#include "tauwright/discretize/transmitter_coefficients.hpp"
#include "tauwright/discretize/valve_coefficients.hpp"
