"""The smallest stabiliser that does the job: what is needed, what there is, what passes, and why."""
