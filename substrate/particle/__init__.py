"""WHAT scatters: shapes and the cells that they fill."""
