"""The only place where rooms are joined: one module per verb, a few short functions each.

    from balance.api.load import load
    from balance.api.check import check
    from balance.api.report import report

    job = load("designs/scout-wheels.yaml")
    result = check(job)
    print(result.passed, report(result, "designs/scout-wheels"))

Reading files needs no numpy, so `balance.api.load` stands apart from the verbs that compute, and nothing is
imported
here.  The `json_*` modules write each answer as the dictionary that `--json` prints.
"""
