"""Instants and the time scales they are told in."""
