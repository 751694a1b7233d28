#!/usr/bin/python3
"""A second, independent reading of one-dimensional NMR files in JCAMP-DX.

Takes another way than the C++ reader: regular expressions, duplicate counts spelled out
as tokens, cumulative sums per line. Usage: read_jcamp.py FILE OUT. Writes the samples to
OUT as raw float64 (an FID as interleaved pairs) and prints: domain, points, spectral
width (Hz), shift at the centre (ppm, "nan" when not stated).
"""
import re
import sys

import numpy as np

POSITIVE = {c: str(i) for letters in ('@ABCDEFGHI', '%JKLMNOPQR') for i, c in enumerate(letters)}
NEGATIVE = {c: f'-{i}' for letters in ('abcdefghi', 'jklmnopqr')
            for i, c in enumerate(letters, 1)}
DIGITS = POSITIVE | NEGATIVE
TOKEN = re.compile(r'[@A-Z%a-s][0-9]*|[+-]?[0-9.]+')
DUPLICATES = ' STUVWXYZs'


def decode(table, points):
    lines = [line.split('$$')[0].strip() for line in table.split('\n')]
    lines = [line for line in lines if line]
    if not re.search(r'[@%A-DF-Za-df-s]', ''.join(lines)):  # free or packed numbers
        found = [re.findall(r'[+-]?[0-9.]+(?:[Ee][+-]?\d+)?', line)[1:] for line in lines]
        values = np.array([float(number) for line in found for number in line])
    else:
        parts, check, last = [], False, None
        for line in lines:
            tokens = []
            for token in TOKEN.findall(re.sub(r'^[-+0-9.]+', '', line)):
                if token[0] in DUPLICATES:
                    count = int(str(DUPLICATES.index(token[0])) + token[1:])
                    tokens += tokens[-1:] * (count - 1)
                else:
                    tokens.append(token)
            steps = np.array([int(DIGITS.get(t[0], t[0]) + t[1:]) for t in tokens], dtype=np.int64)
            moves = np.array([t[0] in '%JKLMNOPQRjklmnopqr' for t in tokens])
            # A running sum that starts anew wherever a value is written out.
            sums = np.cumsum(steps)
            starts = np.maximum.accumulate(np.where(moves, 0, np.arange(len(steps))))
            line_values = sums - sums[starts] + steps[starts]
            if check:
                assert line_values[0] == last, f'check value {line_values[0]}, not {last}'
            parts.append(line_values[1:] if check else line_values)
            check, last = moves[-1], line_values[-1]
        values = np.concatenate(parts).astype(float)
    assert len(values) == points, f'{len(values)} points, not {points}'
    return values


def blocks(text):
    """The label-to-value lists of all blocks, labels in comparable form."""
    open_blocks, done = [], []
    for label, value in re.findall(r'^##([^=\n]*)=((?:(?!^##).*\n?)*)', text, re.M):
        label = re.sub(r'[-/_\s]', '', label).upper()
        if label == 'TITLE':
            open_blocks.append([])
        elif label == 'END':
            done.append(open_blocks.pop())
            continue
        open_blocks[-1].append((label, value))
    return done


def plain(value):
    return value.split('\n')[0].split('$$')[0].strip()


def columns(value):
    return [column.strip() for column in plain(value).split(',')]


def read(path):
    with open(path, encoding='latin-1') as file:
        text = file.read()
    for block in blocks(text):
        labels = dict(reversed(block))
        kind = plain(labels.get('DATATYPE', ''))
        if kind in ('NMR FID', 'NMR SPECTRUM') and plain(labels.get('NUMDIM', '1')) == '1':
            break
    else:
        raise SystemExit('not one-dimensional NMR')
    number = {name: float(plain(labels[name])) for name in
              ('.OBSERVEFREQUENCY', 'FIRSTX', 'LASTX', 'YFACTOR', 'NPOINTS') if name in labels}
    if 'NTUPLES' in labels:
        symbols = columns(labels['SYMBOL'])
        of = {name: dict(zip(symbols, columns(labels[name])))
              for name in ('VARDIM', 'FIRST', 'LAST', 'FACTOR', 'UNITS')}
        first, last, points = float(of['FIRST']['X']), float(of['LAST']['X']), int(of['VARDIM']['X'])
        unit, pages = of['UNITS']['X'], {}
        for label, value in block:
            if label == 'DATATABLE':
                form, table = value.split('\n', 1)
                symbol = re.search(r'\+\+\((\w+)', form)[1]
                pages[symbol] = decode(table, points) * float(of['FACTOR'][symbol])
        samples = pages['R']
        if kind == 'NMR FID':
            samples = np.column_stack([pages['R'], pages['I']]).ravel()
    else:
        first, last, points = number['FIRSTX'], number['LASTX'], int(number['NPOINTS'])
        unit = plain(labels['XUNITS'])
        samples = decode(labels['XYDATA'].split('\n', 1)[1], points) * number['YFACTOR']

    frequency = number['.OBSERVEFREQUENCY']
    reference = [float(c) for c in columns(labels.get('.SHIFTREFERENCE', ''))[-2:] if c]
    if kind == 'NMR FID':
        assert unit == 'SECONDS'
        ppm_of_bin = (points - 1) / (last - first) / frequency / points
        width = ppm_of_bin * points * frequency
        shifts = -ppm_of_bin * (np.arange(points) - points / 2)  # zero frequency at 0
        centre = reference[1] - np.interp(reference[0] - 1, np.arange(points), shifts) \
            if reference else float('nan')
    else:
        shifts = np.linspace(first, last, points) / (frequency if unit == 'HZ' else 1)
        width = points * abs(shifts[1] - shifts[0]) * frequency
        if reference and unit == 'HZ':
            shifts += reference[1] - np.interp(reference[0] - 1, np.arange(points), shifts)
        centre = shifts.mean()
    return kind, points, width, centre, samples


if __name__ == '__main__':
    kind, points, width, centre, samples = read(sys.argv[1])
    samples.astype('<f8').tofile(sys.argv[2])
    print(kind.split()[1], points, repr(float(width)), repr(float(centre)))
