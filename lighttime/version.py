"""The version of this library, said in this one place."""

VERSION = "0.1.0"
