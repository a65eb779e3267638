"""WHAT was asked: answers with error bars, built on all the rest."""
