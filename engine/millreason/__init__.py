"""Which face mill, and why: a rule-based adviser for face milling."""
