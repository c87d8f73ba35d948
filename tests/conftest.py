"""Puts this folder on the path, so that tests can import the simulator and the crew's pencil."""
