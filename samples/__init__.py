"""What came out of the bottle: laboratories, samples, results, coding, checks, intake, trends, outlooks."""
