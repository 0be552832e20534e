"""Checks against published and exact values that a user can run: ``fem-flow verify``."""
