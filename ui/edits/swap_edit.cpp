// Gives the edits a translation unit, so that their header is compiled on its own.
// No units here.
#include "ui/edits/swap_edit.h"
