"""The parts of the C that read alike in both variants: taking a reading, the sums, one unit's limit, the update."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from balance.firmware.program import Program


@dataclass(frozen=True)
class Dialect:
    """How a variant writes its numbers: the prefix of its C names, its type, zero, and how a table of that type is read."""

    prefix: str
    kind: str  # "float" | "int32_t"
    nought: str
    fetch: str  # macro


def commands_of(program: Program) -> list[str]:
    """Return the C field of each unit's command."""
    ending = {"N*m": "torque_n_m", "rad/s": "gimbal_rate_rad_s"}
    plain = ["".join(c if c.isalnum() else "_" for c in unit).lower() for unit in program.units]
    return [f"{name}_{ending[row.unit]}" for name, row in zip(plain, program.inputs, strict=True)]


def take(dialect: Dialect, tests: Sequence[str], values: Sequence[str]) -> str:
    """Return the function that takes a reading; `values`: an expression for each measurement."""
    p, d = dialect.prefix, dialect
    body = "\n".join(
        f"        state->last[{j}] = {value} - {d.fetch}(rests[s][{j}]);" for j, value in enumerate(values)
    )
    believed = "\n        && ".join(tests)
    return f"""/* take the reading if every number of it is believed; a refused one leaves the last good one in its place */
static void take({p}_state *state, const {p}_reading *reading, uint16_t *flags)
{{
    const uint8_t s = state->stance;
    if ({believed}) {{
{body}
        state->refused = 0u;
    }} else {{
        if (state->refused < 255u) {{ state->refused++; }}
        if (state->refused <= PATIENCE) {{ *flags |= FLAG_STALE; }}
    }}
}}"""


def rows(dialect: Dialect, line: str, moves: Sequence[str], held: Sequence[str], asks: Sequence[str]) -> str:
    """Return the functions `wanted`, `remember`, `remember_held` (where there are) and `allot` around their sums."""
    p, kind, copies = (
        dialect.prefix,
        dialect.kind,
        "\n".join(f"    state->memory[{i}] = next[{i}];" for i in range(len(moves))),
    )
    remember = "".join(
        f"""/* {says} */
static void {name}({p}_state *state{given})
{{
    const uint8_t s = state->stance;
    {kind} next[{len(moves)}];
{chr(10).join(sums)}
{copies}
}}

"""
        for name, given, sums, says in (
            ("remember", f", {kind} line", moves, "move the memory on by one sample; it sees the limited command"),
            ("remember_held", "", held, "the same while the machine is held: its model of the fall does not hold then"),
        )
        if sums
    )
    return f"""/* the line command, before its limit */
static {kind} wanted(const {p}_state *state)
{{
    const uint8_t s = state->stance;
    {kind} sum;
{line}
    return sum;
}}

{remember}/* each unit's command, before its limit */
static void allot(const {p}_state *state, {kind} line, {p}_command *command)
{{
    const uint8_t s = state->stance;
{chr(10).join(asks)}
}}"""


def hold_alone(dialect: Dialect, name: str) -> str:
    """Return the function that limits a single unit's command."""
    return f"""/* hold the command within the unit's limit */
static void hold({dialect.prefix}_command *command, uint8_t s, uint16_t *flags)
{{
    const {dialect.kind} held = within(command->{name}, {dialect.fetch}(unit_limits[s][0]));
    if ((held < command->{name}) || (held > command->{name})) {{ *flags |= FLAG_UNIT_LIMITED; }}
    command->{name} = held;
}}"""


def look_at_voltage(dialect: Dialect, calls: Sequence[str]) -> str:
    """Return what compares commands with what motors can give; `calls`: the arguments of each comparison."""
    if not calls:
        return ""
    p, kind = dialect.prefix, dialect.kind
    body = "\n".join(f"    if (gives({call}) == 0u) {{ *flags |= FLAG_VOLTAGE_SHORT; }}" for call in calls)
    return f"""/* what a motor can give at its speed: each end is held within the most, never intersected with it, since
 * above the no-load speed that would leave nothing where the motor really brakes */
static uint8_t gives({kind} asked, {kind} sag, {kind} stall, {kind} most)
{{
    const {kind} high = within(stall - sag, most);
    const {kind} low = within(-stall - sag, most);
    return ((asked <= high) && (asked >= low)) ? 1u : 0u;
}}

static void look_at_voltage(const {p}_state *state, const {p}_command *command, uint16_t *flags)
{{
{body}
}}"""


def update(dialect: Dialect, program: Program) -> str:
    """Return reset, init and update."""
    p, kind, nought = dialect.prefix, dialect.kind, dialect.nought
    k, m = max(len(program.memory), 1), len(program.readings)
    safe = "\n".join(f"        command->{name} = {nought};" for name in commands_of(program))
    zero = "\n".join(f"            command->{name} = {nought};" for name in commands_of(program))
    remember = "        remember(state, line);\n" if program.memory else ""
    if program.held_moves:
        remember = """        if (reading->held != 0u) {
            remember_held(state);
        } else {
            remember(state, line);
        }
"""
    voltage = "            look_at_voltage(state, command, &flags);\n" if any(program.windows) else ""
    return f"""void {p}_reset({p}_state *state)
{{
    uint8_t i;
    for (i = 0u; i < {k}u; i++) {{ state->memory[i] = {nought}; }}
    for (i = 0u; i < {m}u; i++) {{ state->last[i] = {nought}; }}
    state->refused = 255u;
}}

void {p}_init({p}_state *state, uint8_t stance, uint8_t period)
{{
    (void)period; /* checked when this was compiled */
    state->stance = (stance < STANCES) ? stance : 0u;
    {p}_reset(state);
}}

uint16_t {p}_update({p}_state *state, const {p}_reading *reading, {p}_command *command)
{{
    uint16_t flags = 0u;
    take(state, reading, &flags);
    if (state->refused > PATIENCE) {{
        uint8_t i;
        for (i = 0u; i < {k}u; i++) {{ state->memory[i] = {nought}; }}
{safe}
        flags |= FLAG_SAFE;
    }} else {{
        const {kind} most = (reading->held != 0u) ? {nought} : {dialect.fetch}(line_limit[state->stance][0]);
        const {kind} asked = wanted(state);
        const {kind} line = within(asked, most);
        allot(state, line, command);
{remember}        if (reading->held != 0u) {{
{zero}
            flags |= FLAG_HELD;
        }} else {{
            if ((line < asked) || (line > asked)) {{ flags |= FLAG_LINE_LIMITED; }}
            hold(command, state->stance, &flags);
{voltage}        }}
    }}
    return flags;
}}"""
