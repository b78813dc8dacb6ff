"""What pushes from outside: closed-form fields, each in its own file, packed for compiled code."""
