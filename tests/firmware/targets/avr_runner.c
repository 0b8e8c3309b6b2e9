/* Runs an ATmega2560 program instruction by instruction with libsimavr; prints its text, cycles and stack depth. */
#include <simavr/sim_avr.h>
#include <simavr/sim_elf.h>
#include <simavr/sim_io.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { GPIOR0 = 0x3E, GPIOR1 = 0x4A, GPIOR2 = 0x4B }; /* data-space addresses, ATmega2560 data sheet */

static int finished, measuring;
static avr_cycle_count_t begun;
static unsigned top, lowest;

static unsigned stack_pointer(const avr_t *avr) { return avr->data[R_SPL] | (unsigned)avr->data[R_SPH] << 8; }

static void on_text(avr_t *avr, avr_io_addr_t addr, uint8_t v, void *param)
{
    (void)avr; (void)addr; (void)param;
    putchar(v);
}

static void on_mark(avr_t *avr, avr_io_addr_t addr, uint8_t v, void *param)
{
    (void)addr; (void)param;
    if (v == 1) {
        begun = avr->cycle;
        top = lowest = stack_pointer(avr) + 3u; /* the caller's: the mark itself was called, three bytes */
        measuring = 1;
    } else {
        measuring = 0;
        printf("#stack %08x\n#cycles %08llx\n", top - lowest, (unsigned long long)(avr->cycle - begun));
    }
}

static void on_end(avr_t *avr, avr_io_addr_t addr, uint8_t v, void *param)
{
    (void)avr; (void)addr; (void)v; (void)param;
    finished = 1;
}

static void silent(avr_t *avr, const int level, const char *format, va_list rest)
{
    (void)avr; (void)level; (void)format; (void)rest;
}

int main(int count, char **words)
{
    avr_global_logger_set(silent);
    elf_firmware_t firmware;
    memset(&firmware, 0, sizeof firmware);
    if (count != 2 || elf_read_firmware(words[1], &firmware) != 0) { return 2; }
    avr_t *avr = avr_make_mcu_by_name("atmega2560");
    if (avr == NULL) { return 2; }
    avr_init(avr);
    avr->log = LOG_NONE;
    firmware.frequency = 16000000;
    avr_load_firmware(avr, &firmware);
    avr_register_io_write(avr, GPIOR0, on_text, NULL);
    avr_register_io_write(avr, GPIOR1, on_mark, NULL);
    avr_register_io_write(avr, GPIOR2, on_end, NULL);
    int state = cpu_Running;
    while (!finished && state != cpu_Done && state != cpu_Crashed) {
        state = avr_run(avr);
        if (measuring) {
            unsigned now = stack_pointer(avr);
            if (now < lowest) { lowest = now; }
        }
    }
    return state == cpu_Crashed ? 1 : 0;
}
