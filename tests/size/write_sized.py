"""Write the machine files in `sized/` anew (minutes): python -m tests.size.write_sized [DESIGN ...]."""

import sys
from pathlib import Path

from balance.api.load import load
from balance.api.size import apply, size

HERE = Path(__file__).parent / "sized"
DESIGNS = ("bench-rig", "quay-gyros", "scout-wheels")

if __name__ == "__main__":
    for name in sys.argv[1:] or DESIGNS:
        found = size(load(f"designs/{name}.yaml"), 2, f"designs/{name}/size-state.jsonl")
        for chosen in found.best:
            path = HERE / f"{name}-{chosen.candidate.family.replace(' ', '-')}.yaml"
            path.unlink(missing_ok=True)
            apply(found, chosen, str(path))
