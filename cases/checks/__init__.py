"""Published checks: parts whose frequencies are known from elsewhere, solved and compared."""
