"""WHAT is seen: powers, collectors, near fields."""
