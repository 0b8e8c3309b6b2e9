/* What a program under test may ask of the board it runs on; one implementation per target beside this file. */
#ifndef BOARD_H
#define BOARD_H

/* One line of text to the tests; no '#' at its beginning, that is the board's own. */
void put_line(const char *text);

/* Between the two, executed instructions (ARM) or cycles (AVR) and the depth of the stack are measured. */
void mark_start(void);
void mark_stop(void);

#endif
