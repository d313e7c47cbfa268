"""Makes the sounds of Night Tram: whispers, a bell, a motor, a squeal and a tick, from numbers.

    python make.py [FOLDER]

Needs numpy and soundfile. Noise comes from the raw words of a counter-seeded PCG64, whose stream
numpy keeps for ever, so everybody gets the same sounds. 48 kHz, mono, 16 bit FLAC. Nothing lies
below 500 Hz: a narrow beam gives almost no sound there.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import soundfile as sf
from numpy.typing import NDArray

RATE_HZ = 48_000
Sound = NDArray[np.float64]

# Whispered syllables: length in seconds, centre of two bands of breath in hertz, loudness.
TERMINUS = (
    (0.16, 4200, 6500, 0.9), (0.22, 750, 1900, 0.7), (0.20, 1100, 2400, 0.6),
    (0.30, 800, 2100, 0.8), (0.34, 5000, 7500, 0.8),
)  # fmt: skip
STAY_ON = (
    (0.30, 5200, 7800, 0.8), (0.26, 900, 2500, 0.8), (0.14, 3000, 4500, 0.5),
    (0.36, 700, 1300, 0.7), (0.24, 600, 1900, 0.6),
)  # fmt: skip
BELL = (  # partial in hertz, loudness, time to fall by 60 dB in seconds
    (620, 0.5, 3.0), (744, 0.4, 2.4), (930, 0.5, 2.2), (1240, 1.0, 2.6), (1860, 0.6, 1.6),
    (2490, 0.5, 1.1), (3320, 0.3, 0.8), (4810, 0.2, 0.4),
)  # fmt: skip


def seconds(length_s: float) -> Sound:
    """Sample times in seconds."""
    return np.arange(round(length_s * RATE_HZ)) / RATE_HZ


def noise(length_s: float, seed: int) -> Sound:
    """White noise between -1 and 1."""
    words = np.random.PCG64(seed).random_raw(round(length_s * RATE_HZ))
    return words / 2.0**63 - 1.0


def band(sound: Sound, centre_hz: float, width: float) -> Sound:
    """The part of a sound around a centre, a bell of `width` octaves; it joins end to end."""
    spectrum = np.fft.rfft(sound)
    hz = np.fft.rfftfreq(len(sound), 1.0 / RATE_HZ)
    octaves = np.log2(np.maximum(hz, 1.0) / centre_hz)
    return np.fft.irfft(spectrum * np.exp(-0.5 * (octaves / width) ** 2), len(sound))


def swell(length_s: float) -> Sound:
    """A rise and a longer fall, from zero to zero."""
    part = seconds(length_s) / length_s
    return np.sin(np.pi * part**0.6) ** 2


def whisper(syllables: tuple[tuple[float, float, float, float], ...], seed: int) -> Sound:
    """Breath shaped into syllables, said twice, the second time slower."""
    spoken = []
    for turn, pace in enumerate((1.0, 1.25)):
        for number, (length_s, low_hz, high_hz, loudness) in enumerate(syllables):
            breath = noise(length_s * pace, seed + 100 * turn + number)
            voice = band(breath, low_hz, 0.25) + 0.6 * band(breath, high_hz, 0.2)
            voice *= swell(length_s * pace)
            spoken += [loudness * voice / np.max(np.abs(voice)), np.zeros(round(0.05 * RATE_HZ))]
        spoken.append(np.zeros(round(0.3 * RATE_HZ)))
    return np.concatenate(spoken)


def bell() -> Sound:
    """One stroke of a tram's foot bell and its partials dying away."""
    t = seconds(3.0)
    stroke = sum(
        loudness * np.sin(2.0 * np.pi * hz * t) * 10.0 ** (-3.0 * t / fall_s)
        for hz, loudness, fall_s in BELL
    )
    return stroke * np.minimum(1.0, t / 0.003) * np.minimum(1.0, (3.0 - t) / 0.3)


def hum() -> Sound:
    """A motor at rest, three seconds that join end to end: every frequency is a whole cycle."""
    t = seconds(3.0)
    tones = ((600, 1.0), (602, 0.6), (900, 0.5), (1200, 0.6), (1203, 0.3), (1800, 0.3), (2700, 0.1))
    motor = sum(loudness * np.sin(2.0 * np.pi * hz * t) for hz, loudness in tones)
    return motor * (1.0 + 0.2 * np.sin(2.0 * np.pi * t / 3.0)) + band(noise(3.0, 7), 1500, 0.4)


def squeal() -> Sound:
    """A flange on a curved rail: a tone that wavers and breaks up."""
    t = seconds(4.0)
    hz = 2300.0 + 260.0 * np.sin(2.0 * np.pi * 0.4 * t) + 35.0 * np.sin(2.0 * np.pi * 6.3 * t)
    phase = 2.0 * np.pi * np.cumsum(hz) / RATE_HZ
    tone = np.sin(phase) + 0.4 * np.sin(2.0 * phase + 0.7) + 0.2 * np.sin(3.0 * phase)
    rough = band(noise(4.0, 11), 900.0, 0.3)
    return tone * (1.0 + 0.5 * rough / np.max(np.abs(rough))) * swell(4.0)


def tick() -> Sound:
    """A clock, one second that repeats: tick, and a lower tock half a second on."""
    t = seconds(1.0)
    beat = np.zeros_like(t)
    for start_s, hz in ((0.02, 3400.0), (0.52, 2500.0)):
        after_s = np.maximum(t - start_s, 0.0)
        beat += np.sin(2.0 * np.pi * hz * after_s) * np.exp(-after_s / 0.012)
    return beat


def make(folder: Path) -> None:
    """Writes every sound into a folder, each with its peak 6 dB under full scale."""
    sounds = {
        "whisper": whisper(TERMINUS, 1000),
        "reply": whisper(STAY_ON, 2000),
        "bell": bell(),
        "hum": hum(),
        "squeal": squeal(),
        "tick": tick(),
    }
    for name, sound in sounds.items():
        level = 0.5 * sound / np.max(np.abs(sound))
        sf.write(folder / f"{name}.flac", level, RATE_HZ, subtype="PCM_16")
        print(f"{name}.flac  {len(sound) / RATE_HZ:.2f} s")


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
