"""The one caution, said in --help, reports and documents."""

CAUTION = ("Never use this as the only means of safety-critical navigation. Charts, notices to mariners and airmen, "
           "local codes and licensed practice come first.")
