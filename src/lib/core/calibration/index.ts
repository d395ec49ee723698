export { correctedMz, fitMassError, median, predictedError, type MassErrorFit, type MassErrorPoint } from './fit';
