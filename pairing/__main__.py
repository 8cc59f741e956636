"""``python -m pairing`` does what the command ``pairing`` does."""

from pairing.cli.app import main

if __name__ == "__main__":
    main()
