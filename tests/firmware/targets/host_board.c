/* The machine that compiles is a target too: text only, nothing is counted. */
#include "board.h"
#include <stdio.h>

void put_line(const char *text) { (void)puts(text); }
void mark_start(void) { }
void mark_stop(void) { }
