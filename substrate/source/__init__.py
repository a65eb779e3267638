"""WHAT excites, as E at points: plane waves and point emitters."""
