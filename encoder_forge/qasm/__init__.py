"""Encoder to OpenQASM 3 text and back."""
