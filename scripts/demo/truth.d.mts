export function elevationEffect(elevationM: number, shadow: number): number;
export function spatialSlope(xKm: number, yKm: number): number;
