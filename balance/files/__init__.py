"""YAML files with line numbers, read into records by the records' own description."""
