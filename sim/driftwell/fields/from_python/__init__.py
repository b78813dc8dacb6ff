"""Fields that a user gives as functions, from Python only: a file can name one, never hold it."""
