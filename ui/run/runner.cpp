// Gives the runner a translation unit, so that its header is compiled on its own.
// No units here.
#include "ui/run/runner.h"
