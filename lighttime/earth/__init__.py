"""The station: Earth rotation, displacements, and where it is in space."""
