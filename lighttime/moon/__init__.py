"""The reflector: libration, lunar tide, and where it is in space."""
