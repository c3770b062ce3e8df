// Everything of the control floor.
#pragma once

#include "tauwright/control/controller_form.hpp"
#include "tauwright/control/entered.hpp"
#include "tauwright/control/internal_model_controller.hpp"
#include "tauwright/control/pid_response.hpp"
#include "tauwright/control/pid_settings.hpp"
