"""A TypicalBasis becomes an Encoder: one method a file, one registry, one portfolio that picks."""
