"""What happens to the light on its way: pure functions of arrays."""
