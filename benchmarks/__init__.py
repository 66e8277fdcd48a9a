"""Measurements of accuracy, speed, memory and bytes; nothing here is asserted as a time in a test."""
