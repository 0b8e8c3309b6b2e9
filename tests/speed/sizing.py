"""How long a sizing takes, and whether one worker and two find the same: python -m tests.speed.sizing [DESIGN]."""

import sys
import time

from balance.api.load import load
from balance.api.size import size

if __name__ == "__main__":
    job = load(sys.argv[1] if len(sys.argv) > 1 else "designs/bench-rig.yaml")
    fronts = []
    for workers in (2, 1):
        begin = time.perf_counter()
        found = size(job, workers)
        fronts.append(found.confirmed)
        count = sum(len(s.grid) for s in found.surveys)
        took = time.perf_counter() - begin
        print(f"{workers} worker(s): {count} candidates to a front of {len(found.by_push)} in {took:.1f} s")
    print("the same front" if fronts[0] == fronts[1] else "NOT the same front")
