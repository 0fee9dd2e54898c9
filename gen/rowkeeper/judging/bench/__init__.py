"""The bench: memory and bus models in picoseconds, run compiled and in Icarus, and shipped with every board."""
