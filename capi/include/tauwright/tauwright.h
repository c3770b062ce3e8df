/* All of the C interface; the floors' own headers are lighter. */
#ifndef TAUWRIGHT_TAUWRIGHT_H
#define TAUWRIGHT_TAUWRIGHT_H

#include <tauwright/assess.h>
#include <tauwright/control.h>
#include <tauwright/core.h>
#include <tauwright/discretize.h>
#include <tauwright/identify.h>
#include <tauwright/model.h>
#include <tauwright/run.h>
#include <tauwright/synthesize.h>
#include <tauwright/tune.h>

#endif
