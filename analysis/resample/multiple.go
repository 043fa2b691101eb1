package resample
