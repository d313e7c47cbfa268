"""beamctl: programme and run steerable ultrasonic sound beams."""

__version__ = "0.1.0"
