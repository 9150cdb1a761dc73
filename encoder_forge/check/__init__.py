"""Emitted text against the analytic figures: a simulator runs the very text that will be written."""
