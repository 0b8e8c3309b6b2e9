/* Cortex-M under emulation: start-up, text by semihosting, instructions by the system timer, stack by paint.
 *
 * The emulator runs with one nanosecond of virtual time per instruction, so the system timer counts instructions in
 * some board-dependent ratio; a loop of known length, timed once, tells the ratio. Marks are read one by one.
 */
#include "board.h"
#include <stdint.h>

extern uint32_t stack_top, data_load, data_start, data_end, bss_start, bss_end, stack_floor;
int main(void);
void start(void);

#define TIMER_CONTROL (*(volatile uint32_t *)0xE000E010u)
#define TIMER_RELOAD (*(volatile uint32_t *)0xE000E014u)
#define TIMER_NOW (*(volatile uint32_t *)0xE000E018u)
#define LONGEST 0x00FFFFFFu
#define PAINT 0x5AC3A53Cu

__attribute__((section(".vectors"), used)) static const void *const vectors[] = { &stack_top, (const void *)start };

static void ask_host(uint32_t what, const void *with)
{
    register uint32_t r0 __asm__("r0") = what;
    register const void *r1 __asm__("r1") = with;
    __asm__ volatile("bkpt 0xAB" : "+r"(r0) : "r"(r1) : "memory");
}

void put_line(const char *text)
{
    ask_host(0x04u, text); /* SYS_WRITE0 */
    ask_host(0x04u, "\n");
}

static void put_number(const char *name, uint32_t value)
{
    char line[32];
    unsigned at = 0u;
    while (*name != '\0') { line[at++] = *name++; }
    for (int shift = 28; shift >= 0; shift -= 4) { line[at++] = "0123456789abcdef"[(value >> shift) & 15u]; }
    line[at] = '\0';
    put_line(line);
}

static uint32_t begun;
static uint32_t *base;

static void __attribute__((noinline)) known_loop(uint32_t turns)
{
    __asm__ volatile(".syntax unified\n1: subs %0, #1\n bne 1b" : "+l"(turns) : : "cc"); /* two instructions a turn */
}

void __attribute__((noinline)) mark_start(void)
{
    base = (uint32_t *)__builtin_dwarf_cfa(); /* the caller's stack pointer */
    uint32_t *end = (uint32_t *)__builtin_frame_address(0) - 8; /* below this function's own frame */
    for (uint32_t *at = &stack_floor; at < end; at++) { *(volatile uint32_t *)at = PAINT; }
    begun = TIMER_NOW;
}

void __attribute__((noinline)) mark_stop(void)
{
    uint32_t ticks = (begun - TIMER_NOW) & LONGEST;
    const volatile uint32_t *at = &stack_floor;
    while (*at == PAINT) { at++; }
    uint32_t deep = (uint32_t)((const uint8_t *)base - (const volatile uint8_t *)at);
    put_number("#stack ", deep);
    put_number("#ticks ", ticks);
}

void start(void)
{
    uint32_t *from = &data_load;
    for (uint32_t *to = &data_start; to < &data_end; to++) { *to = *from++; }
    for (uint32_t *to = &bss_start; to < &bss_end; to++) { *to = 0u; }
#if defined(__ARM_FP)
    *(volatile uint32_t *)0xE000ED88u |= 0xFu << 20; /* the floating-point unit is off after reset */
    __asm__ volatile("dsb\n isb");
#endif
    TIMER_RELOAD = LONGEST;
    TIMER_NOW = 0u;
    TIMER_CONTROL = 5u; /* on, processor clock, no interrupt */
    uint32_t then = TIMER_NOW;
    known_loop(500000u);
    put_number("#million ", (then - TIMER_NOW) & LONGEST);
    (void)main();
    ask_host(0x18u, (const void *)0x20026u); /* SYS_EXIT, application exit */
    for (;;) { }
}
