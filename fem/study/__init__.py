"""Studies made of several solves."""
