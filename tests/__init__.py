"""Tests: laws, values from outside the project, the command line and the report in a browser."""
