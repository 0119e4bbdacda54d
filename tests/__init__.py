"""The tests, arranged like the apps; coding/ and trends/ need no database, worker/ and browser/ need everything."""
