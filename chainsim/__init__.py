"""chainsim: simulates chain lifts for ball machines and says what holds, what is close, what fails."""

__version__ = "0.1.0"
