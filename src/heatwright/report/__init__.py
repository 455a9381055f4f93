"""Showing entries: figures as SVG from plain numbers, and one self-contained page."""
