"""Each person's own key: made, locked with a passphrase, opened, and used to sign. No IO."""
