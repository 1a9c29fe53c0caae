"""Runs: one machine, its processes, and the folder an audit is written to."""
