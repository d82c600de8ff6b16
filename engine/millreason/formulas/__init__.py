"""Formulas of face milling: pure functions, one module for each subject, units in every name."""
