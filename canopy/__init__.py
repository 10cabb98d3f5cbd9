"""The second room: light and heat in one house, physics apart from solver."""
