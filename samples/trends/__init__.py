"""Trends and forecasts of oil measurands: arrays and plain values in and out, no database, no clock.

Time is in days (any common origin) where dates matter and in months of 30.4375 days inside the filter.
"""
