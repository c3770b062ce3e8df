// Everything of the discretize floor.
#pragma once

#include "tauwright/discretize/pid.hpp"
#include "tauwright/discretize/process.hpp"
