"""The public functions of the package, and what they return."""
