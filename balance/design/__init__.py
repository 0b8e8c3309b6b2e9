"""Laws, margins and robustness, all linear: a plant and a goal into one discrete law and what was measured on it."""
