from validation.case import Case
CASES: tuple[Case, ...] = ()
