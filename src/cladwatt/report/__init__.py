"""What people read: strip pictures, the report, the console's end table, and all wording."""
