"""The first room: the site, the sun, the sky and the hourly weather record."""
