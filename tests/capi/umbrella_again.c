/* The umbrella header twice in one file and in a second file of one program: it defines nothing. */
#include <tauwright/tauwright.h>

#include <tauwright/tauwright.h>

int32_t umbrella_again(void);

int32_t umbrella_again(void) { return tauw_abi_version(); }
