"""Hosts: thin rooms that convert cells, call the registry and convert back; no mechanics here."""
