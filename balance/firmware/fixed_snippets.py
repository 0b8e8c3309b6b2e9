"""Small C functions of the fixed-point variant that no design changes."""

from __future__ import annotations

SMALL = """/* number / 2^places, rounded down. The one place that shifts a signed number (MISRA C:2012 rule 10.1,
 * deviation): a division would round toward zero and cost a hundred cycles. */
INLINED int32_t down(int32_t number, uint8_t places)
{
    return number >> places;
}

/* (number * gain) >> 16 from two products of 16 by 16 bits, rounded down */
#if defined(__AVR__)
/* the same number: with the gain's bits taken as unsigned, part * 2^16 too much is added where it is negative; this
 * way the compiler sees two short products and not two of 32 bits */
INLINED int32_t product(int32_t number, int16_t gain)
{
    const int32_t high = (int32_t)(int16_t)down(number, 16u) * (int32_t)gain;
    const uint16_t part = (uint16_t)((uint32_t)number & 0xFFFFu);
    const uint32_t low = ((uint32_t)part * (uint32_t)(uint16_t)gain) >> 16u;
    const int32_t sum = high + (int32_t)low;
    return (gain < 0) ? (sum - (int32_t)part) : sum;
}
#else
INLINED int32_t product(int32_t number, int16_t gain)
{
    const int32_t high = (int32_t)(int16_t)down(number, 16u) * (int32_t)gain;
    const int32_t low = (int32_t)(uint16_t)((uint32_t)number & 0xFFFFu) * (int32_t)gain;
    return high + down(low, 16u);
}
#endif

INLINED int32_t within(int32_t number, int32_t most)
{
    int32_t held = number;
    if (held < -most) { held = -most; }
    if (held > most) { held = most; }
    return held;
}

INLINED uint8_t believed(int32_t number, int32_t most)
{
    return ((number >= -most) && (number <= most)) ? 1u : 0u;
}"""

SIZE = """INLINED int32_t size_of(int32_t number)
{
    return (number < 0) ? -number : number;
}"""

RATIO_OF = """/* part * 2^places / whole, rounded down, for 0 <= part < whole: bit by bit, always the same number of steps */
static int32_t ratio_of(int32_t part, int32_t whole, uint8_t places)
{
    int32_t rest = part;
    int32_t out = 0;
    uint8_t i;
    for (i = 0u; i < places; i++) {
        rest = rest * 2;
        out = out * 2;
        if (rest >= whole) {
            rest = rest - whole;
            out = out + 1;
        }
    }
    return out;
}"""

ALONG = """/* a vector's part along e (0), u (3) or w (6), with one binary place less */
static int32_t along(uint8_t stance, uint8_t first, int32_t x, int32_t y, int32_t z)
{
    int32_t sum = product(x, FETCH(axes[stance][first])) * 2;
    sum = sum + (product(y, FETCH(axes[stance][first + 1u])) * 2);
    sum = sum + (product(z, FETCH(axes[stance][first + 2u])) * 2);
    return sum;
}"""
