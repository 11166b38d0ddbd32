"""Actions: load cases by the standards."""
