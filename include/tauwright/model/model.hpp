// Everything of the model floor.
#pragma once

#include "tauwright/model/forms.hpp"
#include "tauwright/model/transfer_function.hpp"
