"""Let ``python -m balancer`` run the command line."""

from balancer.commands import main

if __name__ == "__main__":
    main()
