"""Light time between the Earth and the Moon. (The public names are gathered here.)"""
