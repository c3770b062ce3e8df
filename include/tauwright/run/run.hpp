// Everything of the run floor.
#pragma once

#include "tauwright/run/pid_block.hpp"
#include "tauwright/run/process_block.hpp"
