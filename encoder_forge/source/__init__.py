"""A source file becomes a Source, or a precise complaint."""
