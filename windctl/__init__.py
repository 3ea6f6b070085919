"""windctl winds pickup coils on a motorised winding machine and keeps a record of every coil."""

__version__ = "0.1.0"
