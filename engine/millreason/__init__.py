"""Which face mill, and why: a rule-based adviser for face milling."""

__version__ = "0.1.0"
