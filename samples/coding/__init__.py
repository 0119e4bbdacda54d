"""Coding standards, one module each. Pure: plain values in and out."""
