"""Strength: member checks by the timber standards."""
