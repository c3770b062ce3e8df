// Everything of the run floor.
#pragma once

#include "tauwright/run/noise.hpp"
#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"
#include "tauwright/run/transmitter.hpp"
#include "tauwright/run/valve.hpp"
