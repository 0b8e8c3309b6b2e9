"""Write the machine files in `sized/` anew (minutes): python -m tests.size.write_sized."""

from pathlib import Path

from balance.api.load import load
from balance.api.size import apply, size

if __name__ == "__main__":
    for name in ("bench-rig", "quay-gyros", "scout-wheels"):
        found = size(load(f"designs/{name}.yaml"), 2)
        for chosen in found.best:
            path = Path(__file__).parent / "sized" / f"{name}-{chosen.candidate.family.replace(' ', '-')}.yaml"
            path.unlink(missing_ok=True)
            apply(found, chosen, str(path))
