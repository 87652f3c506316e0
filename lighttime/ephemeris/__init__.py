"""Where the bodies of the solar system are."""
