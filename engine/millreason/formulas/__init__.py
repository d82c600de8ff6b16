"""The mathematics of face milling as pure functions, one module per topic."""
