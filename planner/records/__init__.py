"""What is kept and exchanged: case files, the store of versions, secrecy, exchange."""
