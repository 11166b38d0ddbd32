"""Load combinations, envelopes and timber checks for pitched roof trusses."""

__version__ = "0.1.0"
