"""What is done on the Sheet: where the cursor is, and what each verb makes of it."""
