"""Invented jobs that look like real ones, and the script that makes them."""
